"""Provenance: what the parser refuses, and that every shipped table and preset passes it."""

import numpy as np
import pytest

from optics import tables
from optics.spec import OutOfRange

GOOD = {"value": 0.57, "low": 0.55, "high": 0.59, "source": "trade", "at": "usual", "basis": "remembered"}
CURVE = {"wavelength_nm": [400, 500.0], "value": [1.0, 0.2], "source": "assumed", "at": "shape", "basis": "assumed"}


def preset(values=None, curve=None, **top):
    raw = {"kind": "fiber", "note": "a family", "values": values or {}, "curve": curve or {}, **top}
    return tables.parse_preset(raw, "presets/fibers/some_glass.toml")


def test_a_preset_keeps_values_and_their_provenance():
    got = preset({"na": GOOD, "emitter": {"size_mm": {**GOOD, "value": 0.56}}}, {"attenuation": CURVE})
    assert (got.kind, got.name, got.note) == ("fiber", "some_glass", "a family")
    assert set(got.values) == {"na", "emitter.size_mm"}
    na = got.values["na"]
    assert (na.value, na.low, na.high, na.source, na.at, na.basis) == tuple(GOOD.values())
    curve = got.curves["attenuation"]
    assert curve.wavelength_nm == (400.0, 500.0)
    assert curve.low_share is None
    assert preset(name="a name").name == "a name"


def test_texts_truths_and_lists_are_values_too():
    plain = {"source": "trade", "basis": "assumed"}
    got = preset(
        {"form": {"value": "round", **plain}, "hot": {"value": True, **plain}, "c": {"value": [1, 2], **plain}}
    )
    assert [got.values[key].value for key in ("form", "hot", "c")] == ["round", True, (1.0, 2.0)]


@pytest.mark.parametrize(
    ("given", "shares"),
    [
        ({"tolerance_share": 0.2}, (0.8, 1.2)),
        ({"low_share": 0.5, "high_share": 2.0}, (0.5, 2.0)),
        ({"high_share": 1.5}, (None, 1.5)),
    ],
)
def test_the_tolerance_of_a_curve_is_a_pair_of_factors(given, shares):
    curve = preset(curve={"loss": {**CURVE, **given}}).curves["loss"]
    assert (curve.low_share, curve.high_share) == pytest.approx(shares)


WRONG_VALUES = {
    "no source": ({"source": None}, r"some_glass\.toml: values\.na has no source; it must be a key of presets/sources"),
    "unknown source": ({"source": "malitson_1956"}, r"the source 'malitson_1956' \(nearest: malitson_1965\)"),
    "unknown basis": ({"basis": "guessed"}, r"values\.na has the basis 'guessed'; it must be one of read, digitized"),
    "low above": ({"low": 0.6}, r"values\.na is 0\.57 with low 0\.6 and high 0\.59; it must lie between"),
    "high below": ({"high": 0.5}, r"values\.na is 0\.57 with low 0\.55 and high 0\.5; it must lie between"),
    "not finite": ({"value": float("inf")}, r"values\.na is inf; it must be a finite number"),
    "a bound of a text": ({"value": "wide"}, r"values\.na, as it has a tolerance, is 'wide'; it must be a finite"),
    "a text for a bound": ({"low": "less"}, r"is 'less'; it must be a finite number"),
    "at is a number": ({"at": 3}, r"values\.na has at = 3; it must be a text"),
    "unknown key": ({"lo": 0.5}, r"values\.na has the unknown key 'lo' \(nearest: low\); it may have at, basis"),
}


@pytest.mark.parametrize("case", WRONG_VALUES)
def test_a_value_is_refused_with_its_sentence(case):
    change, sentence = WRONG_VALUES[case]
    with pytest.raises(OutOfRange, match=sentence):
        preset({"na": {**GOOD, **change}})


WRONG_CURVES = {
    "lengths": ({"value": [1.0]}, r"curve\.loss has 2 wavelengths and 1 values"),
    "one point": ({"wavelength_nm": [400], "value": [1.0]}, r"1 wavelengths and 1 values; .* 2 or more"),
    "falling": ({"wavelength_nm": [500, 400]}, r"goes from 500 to 400 nm; it must be strictly increasing"),
    "standing": ({"wavelength_nm": [500, 500]}, r"goes from 500 to 500 nm"),
    "a text": ({"value": [1.0, "low"]}, r"curve\.loss\.value is 'low'; it must be a finite number"),
    "no list": ({"value": 3.0}, r"curve\.loss\.value is 3\.0; it must be a list of numbers"),
    "tolerance": ({"tolerance_share": 1.2}, r"tolerance factors -0\.19\d* and 2\.2; they must enclose 1, from 0 up"),
    "high share": ({"high_share": 0.0}, r"tolerance factors None and 0\.0; they must enclose 1"),
    "no source": ({"source": ""}, r"curve\.loss has the source ''"),
    "unknown key": ({"tolerance": 0.2}, r"the unknown key 'tolerance' \(nearest: tolerance_share\)"),
}


@pytest.mark.parametrize("case", WRONG_CURVES)
def test_a_curve_is_refused_with_its_sentence(case):
    change, sentence = WRONG_CURVES[case]
    with pytest.raises(OutOfRange, match=sentence):
        preset(curve={"loss": {**CURVE, **change}})


def test_a_preset_is_refused_for_its_top_level():
    with pytest.raises(OutOfRange, match=r"the top level has the unknown key 'value' \(nearest: values\)"):
        preset(value={})
    with pytest.raises(OutOfRange, match=r"kind is None; it must be a text"):
        tables.parse_preset({"note": "no kind"}, "here.toml")
    with pytest.raises(OutOfRange, match=r"values\.na is 0\.5; it must be a table with value, source"):
        preset({"na": 0.5})
    with pytest.raises(OutOfRange, match=r"values is 3; it must be a table"):
        tables.parse_preset({"kind": "fiber", "note": "", "values": 3}, "here.toml")


def test_an_unknown_preset_names_the_nearest_and_what_there_is():
    with pytest.raises(OutOfRange, match=r"presets/media has no 'watr' \(nearest: water\); it has: air, "):
        tables.preset("media", "watr")
    with pytest.raises(OutOfRange, match=r"presets/nowhere has no 'x'; it has: none\."):
        tables.preset("nowhere", "x")
    with pytest.raises(OutOfRange, match="has no"):
        tables.preset("media", "../sources")


def test_a_file_that_cannot_be_read_is_one_sentence(tmp_path):
    (tmp_path / "broken.toml").write_text('kind = "fiber"\nnote = \n')
    with pytest.raises(OutOfRange, match=r"broken\.toml is not valid TOML: .*line 2"):
        tables.read_toml(tmp_path / "broken.toml")
    (tmp_path / "latin.toml").write_bytes(b'kind = "fiber"\nnote = "caf\xe9"\n')
    with pytest.raises(OutOfRange, match=r"latin\.toml is not text in UTF-8 \(at line 2\)"):
        tables.read_toml(tmp_path / "latin.toml")
    for path in (tmp_path / "none.toml", tmp_path, "with\0null"):
        with pytest.raises(OutOfRange, match="cannot be read; it must be an existing TOML file"):
            tables.read_toml(path)
    with pytest.raises(OutOfRange, match=r"^presets/fibers/none\.toml cannot be read"):
        tables.read_toml(tables.PRESETS / "fibers" / "none.toml")


def test_presets_are_read_once():
    assert tables.preset("media", "water") is tables.preset("media", "water")
    assert tables.table("cie_1931_observer") is tables.table("cie_1931_observer")


@pytest.fixture
def own_folder(tmp_path, monkeypatch):
    """The folder presets/ replaced by an empty one with the same sources, and no cached file."""
    tables.sources()
    (tmp_path / "tables").mkdir()
    monkeypatch.setattr(tables, "PRESETS", tmp_path)
    cached = (tables.preset_names, tables.preset, tables.table, tables.packed)
    for function in cached:
        function.cache_clear()
    yield tmp_path / "tables"
    for function in cached:
        function.cache_clear()


HEAD = 'source = "trade"\nat = "here"\nbasis = "assumed"\n'


def test_columns_are_read_only_arrays_of_one_length(own_folder):
    (own_folder / "good.toml").write_text(HEAD + "[columns]\na = [1, 2]\nb = [0.5, 0.25]\n")
    good = tables.table("good")
    assert good["b"].tolist() == [0.5, 0.25]
    with pytest.raises(ValueError, match="read-only"):
        good["a"][0] = 3.0
    with pytest.raises(OutOfRange, match=r"good\.toml has no column 'bb' \(nearest: b\); it has: a, b"):
        tables.column("good", "bb")
    (own_folder / "uneven.toml").write_text(HEAD + "[columns]\na = [1, 2]\nb = [0.5]\n")
    (own_folder / "empty.toml").write_text(HEAD)
    (own_folder / "bare.toml").write_text("[columns]\na = [1, 2]\n")
    tables.preset_names.cache_clear()
    for name, sentence in (
        ("uneven", "'b': 1"),
        ("empty", "columns of one length"),
        ("bare", "the table has no source"),
    ):
        with pytest.raises(OutOfRange, match=sentence):
            tables.table(name)


@pytest.mark.parametrize("dtype", ["uint8", "uint16"])
def test_a_packed_array_comes_back_to_half_a_code(own_folder, dtype):
    array = np.random.default_rng(7).uniform(-3.0, 5.0, (4, 3, 2))
    raw = tables.pack(array, -3.0, 5.0, dtype)
    lines = [f"{key} = {value if not isinstance(value, str) else repr(value)}" for key, value in raw.items()]
    (own_folder / "some.toml").write_text(HEAD + "\n".join(lines))
    got = tables.packed("some")
    assert got.shape == (4, 3, 2)
    assert abs(got - array).max() <= 8.0 / np.iinfo(dtype).max / 2 * (1 + 1e-9)
    assert not got.flags.writeable


def test_packing_refuses_what_would_be_clipped_or_cannot_be_read():
    with pytest.raises(OutOfRange, match="low is 0, high 1, dtype 'uint16'; low and high must enclose the values"):
        tables.pack(np.array([0.5, 1.5]), 0.0, 1.0)
    with pytest.raises(OutOfRange, match="be one of uint8, uint16"):
        tables.pack(np.array([0.5]), 0.0, 1.0, "float32")
    with pytest.raises(OutOfRange, match="low is 1, high 1"):
        tables.pack(np.array([1.0]), 1.0, 1.0)
    whole = tables.pack(np.zeros(4), 0.0, 1.0)
    for change in ({"dtype": "int64"}, {"bytes": "AAAA"}, {"shape": [5]}):
        with pytest.raises(OutOfRange, match=r"here: its packed array cannot be read"):
            tables.unpack({**whole, **change}, "here")


def test_every_source_says_what_it_is_and_how_it_was_read():
    for key, source in tables.sources().items():
        assert {"title", "note"} <= set(source), key
        assert key not in tables.UNSOURCED


@pytest.mark.parametrize("name", tables.preset_names("tables"))
def test_every_shipped_table_parses(name):
    raw = tables.read_toml(tables.PRESETS / "tables" / f"{name}.toml")
    assert np.isfinite(tables.packed(name)).all() if "bytes" in raw else tables.table(name)
