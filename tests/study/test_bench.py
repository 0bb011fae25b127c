"""Readings fitted: truths of written-out designs recovered within the stated uncertainty, verdicts, refusals, files."""

import argparse
import json

import numpy as np
import pytest

from optics import presets
from optics.commands import bench as command
from optics.report.size import size
from optics.spec import OutOfRange
from optics.study.bench import bench, bench_file
from optics.study.bench_fit import fitted
from optics.study.bench_model import ATTENUATION, Model, sought
from optics.study.bench_readings import Readings, parsed

LAUNCH, NA = "source.launch.transmission", "guide.fiber.na"
LENGTHS = (0.3, 0.6, 1.0, 1.6, 2.4, 3.4, 4.6, 6.0)
RADII = (200.0, 100.0, 60.0, 40.0, 30.0, 22.0, 16.0, 12.0)
DISTANCES = (8.0, 12.0, 18.0, 26.0, 38.0)
LOSS, LIT, TRUE_NA = 1.3, 0.68, 0.485  # truths: factor on the loss, launch transmission (0.85 in the design), NA


def resolved(document, settings):
    return presets.resolve(presets.edited(document, settings))


def scaled(design, factor):
    curve = design.fiberscope.guide.fiber.attenuation
    return {"wavelength_nm": list(curve.wavelength_nm), "value": [factor * one for one in curve.value]}


@pytest.fixture(scope="module")
def cut_back():
    """(design, true readings) of a cut-back: each a document of its own, by `size`."""
    design = presets.open("gearbox_tooth")
    true = {ATTENUATION: scaled(design, LOSS), LAUNCH: LIT}
    sizes = [size(resolved(design.document, {**true, "guide.bundle.length_m": at}).fiberscope) for at in LENGTHS]
    return design, readings("length_m", "power_mw", LENGTHS, [1000 * one.light.delivered_w for one in sizes])


@pytest.fixture(scope="module")
def bent():
    """(design, true readings) of a thick plastic guide bent ever tighter."""
    design = resolved(presets.open("gearbox_tooth").document, {"guide.fiber.preset": "pmma_1mm"})
    true = {NA: TRUE_NA, LAUNCH: LIT}
    bends = [[{"radius_mm": at, "angle_deg": 90.0, "repeats": 2}] for at in RADII]
    sizes = [size(resolved(design.document, {**true, "guide.bundle.bends": one}).fiberscope) for one in bends]
    return design, readings("bend_radius_mm", "power_mw", RADII, [1000 * one.light.delivered_w for one in sizes])


@pytest.fixture(scope="module")
def on_target():
    """(design, true readings) of lux on a wall at several distances."""
    design = presets.open("gearbox_tooth")
    true = {LAUNCH: LIT, "scene.target.near_mm": None, "scene.target.far_mm": None}
    sizes = [size(resolved(design.document, {**true, "scene.target.distance_mm": at}).fiberscope) for at in DISTANCES]
    return design, readings("distance_mm", "lux", DISTANCES, [one.summary.target_center_lux for one in sizes])


def readings(varied, measured, at, got, error=None, turned=None):
    rows = np.arange(1, len(at) + 1)
    error = None if error is None else np.asarray(error, float)
    return Readings(varied, measured, np.array(at, float), np.array(got, float), error, turned, rows, rows + 1)


def noisy(true, share, seed, stated=True):
    """Readings with normal errors of a share of each, and that error stated beside them or not."""
    random = np.random.default_rng(seed)
    got = true.got * (1 + share * random.standard_normal(len(true.at)))
    return readings(true.varied, true.measured, true.at, got, share * true.got if stated else None)


def of(found, path):
    return next(item for item in found.fitted if item.path == path)


# Truth recovered


def test_exact_readings_give_the_truth(cut_back, bent, on_target):
    design, true = cut_back
    found = bench(design, noisy(true, 1e-9, 0), source="r.csv")
    assert of(found, ATTENUATION).value == pytest.approx(LOSS, rel=1e-6)
    assert of(found, LAUNCH).value == pytest.approx(LIT, rel=1e-6)
    design, true = bent
    found = bench(design, noisy(true, 1e-9, 0), source="r.csv")
    assert of(found, NA).value == pytest.approx(TRUE_NA, rel=1e-5)
    assert of(found, LAUNCH).value == pytest.approx(LIT, rel=1e-5)
    design, true = on_target
    found = bench(design, noisy(true, 1e-9, 0), source="r.csv")
    assert of(found, LAUNCH).value == pytest.approx(LIT, rel=1e-6)
    assert [item.path for item in found.fitted] == [LAUNCH]


def test_a_flat_loss_is_the_textbook_cut_back(document):
    """10 log10(P1/P2)/(L2 - L1) is the loss along the rays; the loss of the fiber is less by their path stretch.

    For a filled cone of NA 0.55 to 0.57 in 1.62 the mean stretch is 1.031 to 1.034 (closed form of <sec theta>).
    """
    flat = {"wavelength_nm": [380.0, 1000.0], "value": [0.4, 0.4]}
    design = resolved(document, {ATTENUATION: flat, "guide.bundle.bends": []})
    sizes = [size(resolved(design.document, {"guide.bundle.length_m": at}).fiberscope) for at in LENGTHS]
    power = np.array([1000 * one.light.delivered_w for one in sizes])
    found = bench(design, readings("length_m", "power_mw", LENGTHS, power, 0.01 * power), source="r.csv", flat=True)
    loss = of(found, ATTENUATION)
    assert loss.value == pytest.approx(0.4, rel=1e-6)
    assert loss.unit == "dB/m at all wavelengths"
    slope = -np.polyfit(LENGTHS, 10 * np.log10(power), 1)[0]
    assert 1.029 < slope / loss.value < 1.035


def hits(case, paths, share, draws, stated):
    """How many 95 % intervals hold the truth, for each path, and the mean and spread of its values, and its stated error."""
    design, true = case
    truth = {ATTENUATION: LOSS, LAUNCH: LIT, NA: TRUE_NA}
    inside, values, errors = dict.fromkeys(paths, 0), {path: [] for path in paths}, {path: [] for path in paths}
    for seed in range(draws):
        found = bench(design, noisy(true, share, seed, stated), source="r.csv")
        for path in paths:
            item = of(found, path)
            inside[path] += item.low <= truth[path] <= item.high
            values[path].append(item.value)
            errors[path].append(item.standard_error)
    return inside, values, errors


def test_40_cut_backs_hold_the_truth(cut_back):
    """33 of 40 is the 0.5 % point of a binomial of 0.95; the scatter of 40 fits is their stated error to 30 %."""
    inside, values, errors = hits(cut_back, (ATTENUATION, LAUNCH), 0.01, 40, stated=True)
    for path in (ATTENUATION, LAUNCH):
        assert inside[path] >= 33
        assert 0.7 < np.std(values[path], ddof=1) / np.mean(errors[path]) < 1.3


@pytest.mark.slow
@pytest.mark.parametrize("stated", [True, False])
@pytest.mark.parametrize(
    ("case", "paths"), [("cut_back", (ATTENUATION, LAUNCH)), ("bent", (NA, LAUNCH)), ("on_target", (LAUNCH,))]
)
def test_200_draws_hold_the_truth_in_90_to_99_percent(request, case, paths, stated):
    inside, _, _ = hits(request.getfixturevalue(case), paths, 0.01, 200, stated)
    for path in paths:
        assert 180 <= inside[path] <= 198, (case, path, inside)


def test_the_error_against_a_brute_profile(cut_back):
    """Where chi-square has risen by 1 with the launch free: the textbook meaning of one standard error."""
    design, true = cut_back
    data = noisy(true, 0.003, 4)
    aim = sought(design, data, False)
    model = Model(design, data, aim)
    fit = fitted(model, data, aim)

    def profile(value):
        shape = model.at(value)[0] / data.error
        got = data.got / data.error
        return float(got @ got - (got @ shape) ** 2 / (shape @ shape))

    best, error = fit.values[1], fit.standard_errors[1]
    for side in (-1, 1):
        assert profile(best + side * error) - profile(best) == pytest.approx(1.0, rel=0.05)
    assert profile(best) == pytest.approx(fit.chi_square, rel=1e-6)
    assert profile(best) < min(profile(best * 0.999), profile(best * 1.001))


# Verdicts


def test_the_data_decide_or_not(cut_back):
    design, true = cut_back
    sure = bench(design, noisy(true, 0.003, 1), source="r.csv")
    assert sure.decided
    assert sure.verdict.startswith("The data decide the attenuation")
    vague = bench(design, noisy(true, 0.3, 1), source="r.csv")
    assert not vague.decided
    assert "do not decide" in vague.verdict


def test_lengths_alike_cannot_tell_attenuation_from_launch(cut_back):
    design, _ = cut_back
    found = bench(design, readings("length_m", "power_mw", (1.80, 1.82, 1.86), (300, 299, 301)), source="r.csv")
    assert "cannot tell attenuation from launch: all lengths within 5 %" in found.verdict
    assert [item.path for item in found.fitted] == [LAUNCH]
    assert not found.decided


def test_light_on_the_target_fixes_the_light_as_a_whole(on_target):
    design, true = on_target
    found = bench(design, noisy(true, 0.02, 3), source="r.csv")
    assert "fix the light as a whole" in found.verdict
    assert "cannot tell launch from attenuation" in found.verdict


def test_stated_errors_are_held_against_the_scatter(cut_back):
    design, true = cut_back
    data = noisy(true, 0.02, 5)

    def told(error):
        return bench(design, readings("length_m", "power_mw", LENGTHS, data.got, error), source="r.csv")

    right, small, large = (told(share * true.got) for share in (0.02, 0.002, 0.2))
    assert "The model fits: chi-square" in right.verdict
    assert "does not fit within the stated errors" in small.verdict
    assert small.fit_probability < 1e-3
    # widened by the root of chi-square over the degrees of freedom: as if the errors were ten times larger
    assert of(small, LAUNCH).standard_error == pytest.approx(
        of(right, LAUNCH).standard_error * np.sqrt(right.chi_square / 6), rel=0.01
    )
    assert "better than the stated errors" in large.verdict


def test_repeats_test_the_model(cut_back):
    """Lack of fit over the scatter of repeats: readings that bend away from any exponential are found out."""
    design, true = cut_back
    random = np.random.default_rng(8)
    at = np.repeat(LENGTHS, 2)
    straight = np.repeat(true.got, 2) * (1 + 0.005 * random.standard_normal(16))
    assert "The model fits" in bench(design, readings("length_m", "power_mw", at, straight), source="r.csv").verdict
    crooked = straight * (1 + 0.1 * np.sin(at))
    assert (
        "The model does not fit" in bench(design, readings("length_m", "power_mw", at, crooked), source="r.csv").verdict
    )


def test_an_outlier_is_named_and_kept_unless_asked(cut_back):
    design, true = cut_back
    data = noisy(true, 0.01, 2)
    data.got[4] *= 1.2
    kept = bench(design, data, source="r.csv")
    assert "Apart from the rest: row 5 (line 6, length_m 2.4)" in kept.verdict
    assert "kept. With --without 5" in kept.verdict
    assert [item.row for item in kept.residuals if item.apart] == [5]
    left = bench(design, data, source="r.csv", without=(5,))
    assert [item.row for item in left.residuals] == [1, 2, 3, 4, 6, 7, 8]
    assert left.left_out == (5,)
    assert of(left, ATTENUATION).low < LOSS < of(left, ATTENUATION).high
    unstated = bench(design, readings("length_m", "power_mw", LENGTHS, data.got), source="r.csv")
    assert "row 5" in unstated.verdict


def test_readings_without_scatter_are_told_apart(cut_back):
    """Computed readings: the truth, no interval to speak of, and plain numbers in the answer."""
    found = bench(cut_back[0], cut_back[1], source="r.csv")
    assert of(found, ATTENUATION).value == pytest.approx(LOSS, rel=1e-7)
    assert "scatter not at all" in found.verdict
    json.dumps(found.as_dict(), allow_nan=False)


def test_a_solved_diameter_stays_that_of_the_nominal_design(document):
    settings = {"guide.bundle.diameter_mm": "solve", "body.section.outer_diameter_mm": 4.2}
    design = resolved(document, settings)
    lit = [
        size(resolved(design.document, {"guide.bundle.length_m": at}).fiberscope).light.delivered_w for at in (1.0, 4.0)
    ]
    data = readings("length_m", "power_mw", (1.0, 4.0), [900 * one for one in lit], [1.0, 1.0])
    found = bench(design, data, source="r.csv")
    assert found.launch_factor == pytest.approx(0.9, rel=1e-6)
    assert of(found, ATTENUATION).value == pytest.approx(1.0, rel=1e-6)


def test_honest_scatter_has_no_outliers(cut_back):
    design, true = cut_back
    named = sum("Apart" in bench(design, noisy(true, 0.01, seed), source="r.csv").verdict for seed in range(8))
    assert named <= 1


def test_readings_against_the_model_stand_at_the_edge(cut_back):
    design, true = cut_back
    rising = readings("length_m", "power_mw", LENGTHS, true.got[::-1], 0.01 * true.got)
    found = bench(design, rising, source="r.csv")
    assert not found.decided
    assert "edge of what is possible" in found.verdict


# Back into a design


def test_the_overrides_give_the_fitted_readings(cut_back, tmp_path):
    """The fit written as a design file: `size` of it shows the model's reading at the design's own length."""
    design, true = cut_back
    data = readings("length_m", "power_mw", (*LENGTHS, 1.8), (*true.got, np.interp(1.8, LENGTHS, true.got)))
    found = bench(design, data, source="r.csv")
    own = size(presets.resolve(found.document).fiberscope)
    assert 1000 * own.light.delivered_w == pytest.approx(found.residuals[-1].model, rel=1e-9)
    assert "Fitted to r.csv" in own.caveats[0].text or "Fitted to r.csv" in found.document["note"]


@pytest.mark.parametrize(
    ("settings", "factor", "path"),
    [
        ({}, 0.8, LAUNCH),
        ({}, 1.15, "source.lamp.flux_lm"),  # 0.98 would be brighter than the lamp
        ({"source.launch.form": "matched"}, 1.15, LAUNCH),
        ({"source.launch.form": "matched"}, 1.3, "source.lamp.flux_lm"),  # 1.04 of what comes
        ({"source.launch.form": "butt"}, 0.5, "source.lamp.flux_lm"),
        ({"source.launch.form": "rated", "source.launch.rated_lm": 2.0}, 0.5, "source.launch.rated_lm"),
    ],
)
def test_where_a_launch_factor_goes(document, settings, factor, path):
    design = resolved(document, settings)
    lit = {}
    for at in (1.0, 3.0):
        one = size(resolved(document, {**settings, "guide.bundle.length_m": at}).fiberscope)
        lit[at] = 1000 * factor * one.light.delivered_w
    data = readings("length_m", "power_mw", list(lit), list(lit.values()), [1.0, 1.0])
    found = bench(design, data, source="r.csv")
    assert path in found.overrides
    there = size(presets.resolve(presets.edited(found.document, {"guide.bundle.length_m": 3.0})).fiberscope)
    assert 1000 * there.light.delivered_w == pytest.approx(lit[3.0], rel=1e-6)


# Files


def written(path, true, header="length_m,power_mw,standard_error_mw"):
    lines = [f"{at},{got:.9g},{0.01 * got:.9g}" for at, got in zip(true.at, true.got)]
    path.write_text("\n".join([header, *lines]) + "\n")
    return path


def run(capsys, *arguments):
    parser = argparse.ArgumentParser()
    command.add_arguments(parser)
    status = command.run(parser.parse_args(list(map(str, arguments))))
    return status, capsys.readouterr().out


def test_the_command_end_to_end(capsys, tmp_path, cut_back):
    file = written(tmp_path / "cut.csv", cut_back[1])
    status, out = run(capsys, "gearbox_tooth", file, "--json")
    assert status == 0
    answer = json.loads(out)
    assert {"path", "value", "standard_error"} <= set(answer["fitted"][0])
    assert answer["fitted"][0]["source"] == "cut.csv"
    assert {"fitted", "residuals", "verdict"} <= set(answer)
    assert len(answer["residuals"]) == 8
    assert answer["overrides"][LAUNCH] == pytest.approx(LIT, rel=1e-6)
    assert out == run(capsys, "gearbox_tooth", file, "--json")[1]
    _, text = run(capsys, "gearbox_tooth", file)
    for words in (
        "The data decide the attenuation",
        "guide.fiber.attenuation",
        "Readings against the fit",
        "std. errors",
    ):
        assert words in text
    assert "nan" not in text
    assert max(map(len, text.splitlines())) <= 140


def test_a_design_is_written_and_nothing_overwritten(capsys, tmp_path, cut_back):
    file, to = written(tmp_path / "cut.csv", cut_back[1]), tmp_path / "fitted.toml"
    run(capsys, "gearbox_tooth", file, "--to", to)
    first = to.read_text()
    again = presets.open(to)
    assert again.fiberscope.source.launch.transmission == pytest.approx(LIT, rel=1e-6)
    assert "Fitted to cut.csv" in again.fiberscope.note
    assert first.startswith("# guide.fiber.attenuation: 1.3")
    to.write_text("mine")
    with pytest.raises(OutOfRange, match="exists already; --force"):
        run(capsys, "gearbox_tooth", file, "--to", to)
    assert to.read_text() == "mine"
    run(capsys, "gearbox_tooth", file, "--to", to, "--force")
    assert to.read_text() == first
    with pytest.raises(OutOfRange, match=r"must end in .toml"):
        run(capsys, "gearbox_tooth", file, "--to", tmp_path / "fitted.txt")
    with pytest.raises(OutOfRange, match="cannot be written"):
        run(capsys, "gearbox_tooth", file, "--to", tmp_path / "nowhere" / "fitted.toml")


def test_notes_marks_and_separators_are_read():
    text = "# straight from the meter\nlength_m;power_mw\n\n0.5;300\n# a pause\n1.0; 290\n2.0;270\n"
    found = parsed(text, "r.csv")
    assert found.at.tolist() == [0.5, 1.0, 2.0]
    assert found.got.tolist() == [300.0, 290.0, 270.0]
    assert (found.row.tolist(), found.line.tolist()) == ([1, 2, 3], [4, 6, 7])
    assert found.error is None


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "is empty"),
        ("length_m,power_mw\n", "has 0 readings; a fit needs at least 2"),
        ("length_m,power_mw\n1,300\n", "has 1 reading; a fit needs at least 2"),
        ("length_m,power_mw\n1,300\n2,\n", "row 2: power_mw is missing"),
        ("length_m,power_mw\n1,300\n2\n", "row 2: it has 1 cells under 2 columns"),
        ("length_m,power_mw\n1,300\n2,much\n", "row 2: power_mw is 'much'; it must be a number"),
        ("length_m;power_mw\n1;300\n2;290,5\n", "row 2: power_mw is '290,5'; it must be a number, with a point"),
        ("length_m,power_mw\n1,300\n-2,290\n", "row 2: length_m is -2; it must be a finite number above 0"),
        ("length_m,power_mw\n1,nan\n2,290\n", "row 1: power_mw is nan; it must be a finite number"),
        ("length_m,power_mw,standard_error_mw\n1,300,0\n2,290,1\n", "row 1: standard_error_mw is 0"),
        ("length_m,power_w\n1,0.3\n2,0.29\n", "column 'power_w' in a unit that is not known here: it must be power_mw"),
        (
            "length_cm,power_mw\n1,300\n2,290\n",
            "column 'length_cm' in a unit that is not known here: it must be length_m",
        ),
        ("length,power_mw\n1,300\n2,290\n", "column 'length' in a unit that is not known here: it must be length_m"),
        ("length_m,lux\n1,300\n2,290\n", "has length_m but no column power_mw"),
        ("length_m,power_mw,color\n1,300,red\n", "column 'color'"),
        ("length_m,length_m,power_mw\n1,1,300\n", "has the column length_m 2 times"),
        ("length_m,distance_mm,power_mw\n1,1,300\n", "must have one of the columns"),
        ("power_mw\n300\n290\n", "it has none"),
        ("length_m,power_mw,bend_deg\n1,300,90\n2,290,90\n", "bend_deg, which does not go with length_m"),
        ("1.0,300\n2.0,290\n", "has the column '1.0'"),
    ],
)
def test_bad_readings_are_one_sentence(text, said):
    with pytest.raises(OutOfRange) as wrong:
        parsed(text, "r.csv")
    assert said in str(wrong.value)
    assert str(wrong.value).startswith("r.csv")
    assert "\n" not in str(wrong.value)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("length_m,power_mw\n0.5,0.30\n1,0.29\n2,0.27\n", "times what the design gives; is power_mw in its unit"),
        (
            "length_m,power_mw\n50,300\n100,290\n200,270\n",
            "length_m runs from 50 to 200, but guide.bundle.length_m is 1.8",
        ),
        (
            "length_m,power_mw\n1,300\n2,290\n",
            "2 readings without standard errors cannot fix 2 numbers; take 3 or more",
        ),
        ("bend_radius_mm,power_mw\n0.01,300\n2,290\n9,290\n", "bend_radius_mm is 0.01; it must be above half the core"),
    ],
)
def test_readings_that_the_design_cannot_have(text, said):
    with pytest.raises(OutOfRange, match=said) as wrong:
        bench(presets.open("gearbox_tooth"), parsed(text, "r.csv"), source="r.csv")
    assert "\n" not in str(wrong.value)


def test_bends_need_an_angle_and_a_target_its_scene(document):
    text = "bend_radius_mm,power_mw\n20,300\n40,310\n80,312\n"
    straight = resolved(document, {"guide.bundle.bends": []})
    with pytest.raises(OutOfRange, match="the readings need a column bend_deg"):
        bench(straight, parsed(text, "r.csv"), source="r.csv")
    bare = resolved(document, {"scene": None, "image": None, "viewer": None, "body": None, "needs": None})
    with pytest.raises(OutOfRange, match=r"the design has no scene.target.distance_mm"):
        bench(bare, parsed("distance_mm,lux\n20,300\n40,310\n", "r.csv"), source="r.csv")


def test_stated_angles_are_those_of_the_design(bent):
    """A column of angles against the design's own bends: two separate bends of 90 degrees are not one of 180."""
    design, true = bent
    one = resolved(design.document, {"guide.bundle.bends": [{"radius_mm": 30.0, "angle_deg": 90.0}]})
    stated = readings(true.varied, true.measured, RADII, true.got, turned=np.full(8, 90.0))
    own = readings(true.varied, true.measured, RADII, true.got)
    aim = sought(one, own, False)
    np.testing.assert_allclose(Model(design, stated, aim).at(0.48)[0], Model(one, own, aim).at(0.48)[0], rtol=1e-12)


def test_files_that_cannot_be_read(tmp_path):
    design = presets.open("gearbox_tooth")
    with pytest.raises(OutOfRange, match="cannot be read"):
        bench_file(design, tmp_path / "none.csv")
    (tmp_path / "binary.csv").write_bytes(b"\xff\xfe\x00length")
    with pytest.raises(OutOfRange, match="not text in UTF-8"):
        bench_file(design, tmp_path / "binary.csv")
    (tmp_path / "three.csv").write_text("\ufefflength_m,power_mw\n1,300\n2,290\n3,281\n", encoding="utf-8")
    assert len(bench_file(design, tmp_path / "three.csv").residuals) == 3
    with pytest.raises(OutOfRange, match="--without is 7"):
        bench_file(design, tmp_path / "three.csv", without=(7,))
    with pytest.raises(OutOfRange, match="--flat goes with length_m"):
        bench(design, parsed("distance_mm,lux\n20,300\n40,310\n", "r.csv"), source="r.csv", flat=True)
