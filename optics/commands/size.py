"""`size`: light on the target, smallest detail, fit and caveats of one design."""

import argparse

from optics.commands.terminal import add_design, as_json, opened, paragraph, rounded, table
from optics.needs import AT_MOST
from optics.report.answer import Report
from optics.report.reasons import limit_reason
from optics.report.size import size
from optics.report.verdict import sentence


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_design(parser)
    parser.add_argument("--json", action="store_true", help="JSON alone, numbers unrounded")


def run(options: argparse.Namespace) -> int:
    design = opened(options)
    report = size(design.fiberscope, design.sourced)
    print(as_json(report.as_dict()) if options.json else written(report))
    return 0


def written(report: Report) -> str:
    """The report as text: the answer first, then the light, the target, the detail, the body, the needs, caveats last."""
    parts = [
        f"{report.name}  ({report.setting}, design {report.design_hash}, version {report.version})",
        paragraph(sentence(report), lead=""),
        "",
    ]
    parts += ["Light, in the order of its way", _light(report), ""]
    if report.target:
        parts += ["On the target", _pairs(_target_rows(report)), ""]
    if report.detail:
        parts += ["Detail", _pairs(_detail_rows(report)), "", _ledger(report), ""]
    if report.fit:
        parts += ["Fit and passage", _pairs(_fit_rows(report)), ""]
    if report.exposure:
        parts += ["Screening of optical radiation (a screening estimate, no certificate)", _screening(report), ""]
    if report.needs:
        rows = [
            (
                ("met" if line.met else "NOT met"),
                line.name,
                rounded(line.wanted),
                rounded(line.got),
                _margin(line.margin, line.name),
            )
            for line in report.needs
        ]
        parts += ["Needs", table([("", "", "wanted", "got", "margin"), *rows], right=(2, 3, 4)), ""]
    parts += ["Caveats", *(paragraph(f"{item.where}: {item.text}", lead="  - ") for item in report.caveats)]
    return "\n".join(parts)


def _screening(report: Report) -> str:
    """Each line as its numbers, and below them what they are held against."""
    said = []
    for line in report.exposure:
        held = f", screening figure {rounded(line.limit)}" if line.limit is not None else ""
        value = "not assessed" if line.value is None else f"{rounded(line.value)} {line.unit}".strip()
        said += [paragraph(f"{line.name}: {value}{held}"), paragraph(line.because, lead="      ")]
    return "\n".join(said)


def _margin(margin: float | None, name: str) -> str:
    """A relative margin in percent; as a multiple where percent stop helping."""
    if margin is None:
        return "-"
    if name not in AT_MOST and margin > 2:
        return f"{1 + margin:.{0 if margin > 9 else 1}f} times"
    return f"{margin:+.0%}"


def _pairs(rows) -> str:
    return table([(name, rounded(value), unit) for name, value, unit in rows if value is not None], right=(1,))


def _light(report: Report) -> str:
    light = report.light
    rows = [(step.name, rounded(step.after_lm), f"x {step.factor:.3f}", step.because) for step in light.steps]
    color = f"{light.color_temperature_k:.0f} K, Duv {light.duv_ratio:+.4f}, color rendering index"
    said = (
        f"{rounded(light.delivered_w)} W, 95 % within NA {light.exit_na:.3f}, {color} {light.color_rendering_index:.0f}"
    )
    total = [("delivered", rounded(light.delivered_lm), f"x {light.transmission:.3f}", said)]
    return table([("", "lm", "factor", ""), *rows, *total], right=(1, 2))


def _target_rows(report: Report):
    target = report.target
    return [
        ("at the center", target.center_lux, "lux"),
        ("mean over the field of view", target.mean_lux, "lux"),
        ("least in the field of view", target.min_lux, "lux"),
        ("evenness (least over mean)", target.evenness, ""),
        ("field without light", target.unlit_fraction, "of its area"),
        ("irradiance at the center", target.center_w_m2, "W/m2"),
        ("radius of the field", target.field_radius_mm, "mm"),
        ("light reaches the axis from", target.first_lit_mm, "mm"),
        ("every port lights the axis from", target.fully_lit_mm, "mm"),
    ]


def _detail_rows(report: Report):
    detail, summary = report.detail, report.summary
    return [
        ("resolved at the target", summary.resolved_lp_mm, "lp/mm"),
        ("smallest gap seen", summary.smallest_gap_mm, "mm"),
        ("thinnest dark line seen", summary.smallest_line_mm, "mm"),
        ("one pitch at the target", detail.pitch_at_target_mm, "mm"),
        ("lattice limit at the target", detail.lattice_limit_lp_mm, "lp/mm"),
        ("signal to noise of one core", detail.snr, ""),
        ("exposure", detail.exposure_s, "s"),
        ("sharp from", detail.near_mm, "mm"),
        ("sharp to", "far away" if detail.far_mm is None else detail.far_mm, "" if detail.far_mm is None else "mm"),
        ("field of view", summary.field_of_view_deg, "deg"),
        ("limited by", summary.limited_by, limit_reason(summary.limited_by)),
    ]


def _ledger(report: Report) -> str:
    rows = [
        (line.name, f"{line.contrast:.3f}", "no limit" if line.limit_lp_mm is None else rounded(line.limit_lp_mm))
        for line in report.detail.ledger
    ]
    return table([("part", "contrast there", "alone allows, lp/mm"), *rows], right=(1, 2))


def _fit_rows(report: Report):
    fit, summary = report.fit, report.summary
    return [
        ("outer diameter", fit.outer_diameter_mm, "mm"),
        ("lumen", fit.lumen_mm, "mm"),
        ("free area", fit.free_area_mm2, "mm2"),
        ("light area (fibers)", fit.light_area_mm2, "mm2"),
        ("fibers", fit.fiber_count, ""),
        ("rigid tip", summary.rigid_tip_mm, "mm"),
        ("longest rigid tip that passes", fit.longest_rigid_tip_mm, "mm"),
        ("least bend radius of the tube", fit.bend_radius_mm, "mm"),
        ("bend radius that the bore gives", fit.passable_radius_mm, "mm"),
        ("passes", fit.passes, ""),
    ]
