"""The command line as people meet it: JSON to the letter, tables that read well, bad input in one sentence."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

from optics.__main__ import COMMANDS, main

ROOT = Path(__file__).resolve().parent.parent
SUMMARY = """target_center_lux target_mean_lux target_min_lux evenness smallest_gap_mm smallest_line_mm resolved_lp_mm limited_by
outer_diameter_mm bend_radius_mm rigid_tip_mm field_of_view_deg needs_met""".split()
LIGHT = "steps delivered_lm delivered_w transmission exit_na color_temperature_k color_rendering_index".split()
TARGET = "center_lux mean_lux min_lux evenness unlit_fraction center_w_m2 field_radius_mm first_lit_mm".split()
DETAIL = "ledger pitch_at_target_mm lattice_limit_lp_mm snr exposure_s near_mm far_mm".split()
FIT = """outer_diameter_mm lumen_mm free_area_mm2 light_area_mm2 fiber_count longest_rigid_tip_mm passes bend_radius_mm
passable_radius_mm""".split()


def run(capsys, *arguments):
    """(exit status, standard output, standard error) of a command, in this process."""
    try:
        status = main(list(arguments))
    except SystemExit as stop:
        status = stop.code
    out = capsys.readouterr()
    return status, out.out, out.err


def test_size_gives_every_key(capsys):
    status, out, err = run(capsys, "size", "gearbox_tooth", "--json")
    assert (status, err) == (0, "")
    answer = json.loads(out)
    assert set(answer) >= set(
        "version design_hash name setting summary light target detail fit exposure needs caveats".split()
    )
    for key, names in (("summary", SUMMARY), ("light", LIGHT), ("target", TARGET), ("detail", DETAIL), ("fit", FIT)):
        assert set(answer[key]) >= set(names), key
    assert all(set(step) >= {"name", "before_lm", "after_lm", "factor", "because"} for step in answer["light"]["steps"])
    assert all(set(line) >= {"name", "contrast", "limit_lp_mm"} for line in answer["detail"]["ledger"])
    assert all(set(line) >= {"name", "wanted", "got", "margin", "met"} for line in answer["needs"])
    assert all(set(line) >= {"name", "value", "unit", "limit", "because"} for line in answer["exposure"])
    assert all(set(item) >= {"where", "text"} for item in answer["caveats"])
    assert "NaN" not in out
    assert "Infinity" not in out


def test_the_same_file_gives_the_same_bytes():
    command = [sys.executable, "-m", "optics", "size", "gearbox_tooth", "--json"]
    first, second = (subprocess.run(command, cwd=ROOT, capture_output=True, check=True).stdout for _ in range(2))
    assert first == second


def test_the_hash_is_of_the_design_not_of_its_name(capsys):
    def answered(*settings):
        return json.loads(run(capsys, "size", "gearbox_tooth", "--json", *settings)[1])

    plain = answered()
    assert answered("--set", "name=Other", "--set", "note=x")["design_hash"] == plain["design_hash"]
    assert answered("--set", "guide.bundle.length_m=1.9")["design_hash"] != plain["design_hash"]


def test_size_reads_well(capsys):
    status, out, _ = run(capsys, "size", "gearbox_tooth")
    assert status == 0
    for words in ("Light, in the order of its way", "On the target", "Detail", "Fit and passage", "Needs", "Caveats"):
        assert words in out
    assert out.index("Needs") < out.index("Caveats")
    assert "nan" not in out
    assert max(map(len, out.splitlines())) <= 140


@pytest.mark.parametrize(("setting", "way"), [("guide.bundle.length_m=3.6", -1), ("source.lamp.flux_lm=800", 1)])
def test_numbers_move_the_right_way(capsys, setting, way):
    def center(*more):
        return json.loads(run(capsys, "size", "gearbox_tooth", "--json", *more)[1])["summary"]["target_center_lux"]

    assert (center("--set", setting) - center()) * way > 0


def test_a_files_own_curve_is_used(capsys, tmp_path):
    """Own data: a lamp's spectrum and a fiber's loss inside the design file."""
    text = (ROOT / "presets/fiberscopes/gearbox_tooth.toml").read_text()
    text = text.replace(
        '[guide.fiber]\npreset  = "lead_silicate_na057"',
        '[guide.fiber]\npreset  = "lead_silicate_na057"\nattenuation = { wavelength_nm = [350.0, 1100.0], value = [1.0, 1.0] }',
    )
    own = tmp_path / "own.toml"
    own.write_text(text)
    answer = json.loads(run(capsys, "size", str(own), "--json")[1])
    step = next(step for step in answer["light"]["steps"] if step["name"] == "attenuation")
    # 1 dB/m over 1.8 m along a path stretched by a few percent
    assert 0.640 < step["factor"] < 10 ** (-0.18)


BAD = [
    (("size", "no_such_file.toml"), "no_such_file.toml is no file and no demo design"),
    (("size", "gearbox_teeth"), "nearest: gearbox_tooth"),
    (
        ("size", "gearbox_tooth", "--set", "guide.bundle.lenth_m=2"),
        "guide.bundle.lenth_m is not a known key (nearest: length_m)",
    ),
    (("size", "gearbox_tooth", "--set", "guide.bundle.length_m=-2"), "guide.bundle.length_m is -2; it must be"),
    (
        ("size", "gearbox_tooth", "--set", "guide.bundle.length_m=inf"),
        "guide.bundle.length_m is inf; it must be a finite number",
    ),
    (
        ("size", "gearbox_tooth", "--set", "guide.bundle.length_m=nan"),
        "guide.bundle.length_m is nan; it must be a finite number",
    ),
    (("size", "gearbox_tooth", "--set", "guide.fiber.preset=lead"), "guide.fiber.preset is 'lead'"),
    (("size", "gearbox_tooth", "--set", "nonsense"), "--set nonsense is not of the form path=value"),
    (
        ("size", "gearbox_tooth", "--set", "guide.fiber.na=1.45", "--set", "guide.fiber.core_index=1.4"),
        "the NA must be below",
    ),
    (("size", "gearbox_tooth", "--set", "source.launch.spot_mm=0.3"), "brighter than its lamp allows"),
    (("list", "fibres"), "FOLDER is 'fibres'"),
]


@pytest.mark.parametrize(("arguments", "said"), BAD)
def test_bad_input_is_one_sentence_and_status_1(capsys, tmp_path, monkeypatch, arguments, said):
    status, out, err = run(capsys, *arguments)
    assert status == 1
    assert out == ""
    assert said in err
    assert err.count("\n") == 1
    assert "Traceback" not in err


def test_broken_toml_names_file_and_line(capsys, tmp_path):
    broken = tmp_path / "broken.toml"
    broken.write_text('format = 1\nkind = "fiberscope\n')
    status, _, err = run(capsys, "size", str(broken))
    assert status == 1
    assert "broken.toml" in err
    assert "line 2" in err
    assert err.count("\n") == 1


def test_wrong_usage_is_status_2(capsys):
    assert run(capsys, "size")[0] == 2
    assert run(capsys, "no_such_command")[0] == 2


def test_list_shows_designs_and_presets(capsys):
    status, out, _ = run(capsys, "list")
    assert status == 0
    for words in ("gearbox_tooth", "lead_silicate_na057", "white_led_4000k", "leached_glass_10um", "invented"):
        assert words in out
    found = json.loads(run(capsys, "list", "--json")[1])
    assert {"fiberscopes", "lamps", "fibers"} <= set(found)


def test_check_holds_the_published_rows(capsys, monkeypatch):
    """On some of the rows: `tests/test_published.py` holds each of them."""
    from optics.commands import check
    from optics.published import rows

    monkeypatch.setattr(check, "rows", lambda: [row for row in rows() if row.quantity.startswith(("media", "image"))])
    status, out, _ = run(capsys, "check")
    assert status == 0
    assert "0 disagree" in out
    assert json.loads(run(capsys, "check", "--json")[1])["disagree"] == 0


def test_help_names_every_command(capsys):
    out = run(capsys, "--help")[1]
    assert all(name in out for name in COMMANDS)
