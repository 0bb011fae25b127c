"""`size`: the whole answer for one design. `evaluate` does the numbers; this adds the words."""

import hashlib
import json
from collections.abc import Mapping
from typing import Any

import numpy as np
from pydantic import ValidationError

from optics.beam import Step
from optics.chain.columns import columns
from optics.chain.evaluate import Figures, evaluate
from optics.chain.solve import with_solved
from optics.fiberscope import Fiberscope
from optics.needs import Summary, verdict
from optics.report.answer import DetailAnswer, FitAnswer, LightAnswer, Limit, Report, TargetAnswer
from optics.report.caveats import caveats
from optics.report.exposure import exposure
from optics.report.reasons import step_reason
from optics.spec import OutOfRange, refusal
from optics.tables import Sourced
from optics.viewer.detail import PARTS

VERSION = "0.1.0"


def size(fiberscope: Fiberscope, sourced: Mapping[str, Sourced] | None = None) -> Report:
    """Light on the target, smallest detail, fit and caveats of one design.

    `sourced` (of a `presets.Design`) lets the caveats name what is only assumed or remembered.

    >>> from optics.presets import open
    >>> report = size(open("gearbox_tooth").fiberscope)
    >>> report.summary.needs_met in (True, False)
    True
    """
    table = columns([fiberscope])
    return report_of(fiberscope, evaluate(table), 0, sourced)


def report_of(fiberscope: Fiberscope, figures: Figures, row: int, sourced: Mapping[str, Sourced] | None) -> Report:
    """The report of one row of evaluated designs."""
    value = {name: float(found[row]) for name, found in figures.value.items()}
    asked, fiberscope = fiberscope, _with_numbers(fiberscope, value)
    number = {name: (found if np.isfinite(found) else None) for name, found in value.items()}
    steps = _steps(fiberscope, figures, row, value)
    light = LightAnswer(
        steps,
        value["delivered_lm"],
        value["delivered_w"],
        value["transmission"],
        value["exit_na"],
        value["color_temperature_k"],
        value["color_rendering_index"],
        value["color_duv"],
    )
    limited = figures.limited_by()[row]
    got = {
        "target_center_lux": number["center_lux"],
        "target_mean_lux": number["mean_lux"],
        "target_min_lux": number["min_lux"],
        "evenness": number["evenness"],
        "smallest_gap_mm": number["smallest_gap_mm"],
        "smallest_line_mm": number["smallest_line_mm"],
        "resolved_lp_mm": number["resolved_lp_mm"],
        "outer_diameter_mm": number["outer_diameter_mm"],
        "bend_radius_mm": number["bend_radius_mm"],
        "rigid_tip_mm": number["rigid_tip_mm"],
        "field_of_view_deg": number["field_of_view_deg"],
    }
    needs = verdict(
        fiberscope.needs,
        {
            **got,
            "target_uva_w_m2": number["uva_w_m2"],
            "frame_hz": number["frame_hz"],
            "color_rendering_index": value["color_rendering_index"],
        },
    )
    summary = Summary(**got, limited_by=limited, needs_met=all(line.met for line in needs) if needs else None)
    lines = exposure(fiberscope, figures, row)
    return Report(
        version=VERSION,
        design_hash=design_hash(asked),
        name=fiberscope.name,
        setting=fiberscope.setting,
        summary=summary,
        light=light,
        target=_target(number) if fiberscope.scene else None,
        detail=_detail(number) if fiberscope.image else None,
        fit=_fit(fiberscope, number, value) if fiberscope.body else None,
        exposure=lines,
        needs=tuple(needs),
        caveats=caveats(fiberscope, value, sourced),
    )


def _with_numbers(fiberscope: Fiberscope, value: Mapping[str, float]) -> Fiberscope:
    """The design with what was solved for as numbers; refused in one sentence where the tube leaves too little."""
    try:
        return with_solved(fiberscope, value)
    except ValidationError as wrong:
        raise OutOfRange(f"the tube leaves too little room: {refusal(Fiberscope, wrong)}") from None


def design_hash(fiberscope: Fiberscope) -> str:
    """Twelve hex digits of the resolved design, name and note left out."""
    told = fiberscope.model_dump(mode="json", exclude={"name", "note"})
    return hashlib.sha256(json.dumps(told, sort_keys=True).encode()).hexdigest()[:12]


def _steps(fiberscope: Fiberscope, figures: Figures, row: int, value: Mapping[str, float]) -> tuple[Step, ...]:
    steps, before = [], None
    for name, lumens in figures.after_lm.items():
        after = float(lumens[row])
        if np.isnan(after):
            continue
        steps.append(Step(name, after if before is None else before, after, step_reason(name, fiberscope, value)))
        before = after
    return tuple(steps)


def _target(number: Mapping[str, Any]) -> TargetAnswer:
    return TargetAnswer(
        number["center_lux"],
        number["mean_lux"],
        number["min_lux"],
        number["evenness"],
        number["unlit_fraction"],
        number["center_w_m2"],
        number["field_radius_mm"],
        number["first_lit_mm"],
        number["fully_lit_mm"],
    )


def _detail(number: Mapping[str, Any]) -> DetailAnswer:
    ledger = tuple(
        Limit(part, number[f"contrast.{part}"], number[f"limit.{part}"])
        for part in PARTS
        if number[f"contrast.{part}"] is not None
    )
    return DetailAnswer(
        ledger,
        number["pitch_at_target_mm"],
        number["lattice_limit_lp_mm"],
        number["snr"],
        number["exposure_s"],
        number["near_mm"],
        number["far_mm"],
    )


def _fit(fiberscope: Fiberscope, number: Mapping[str, Any], value: Mapping[str, float]) -> FitAnswer:
    passes = number["passes"]
    return FitAnswer(
        number["outer_diameter_mm"],
        number["lumen_mm"],
        number["free_area_mm2"],
        value["light_area_mm2"],
        int(value["fiber_count"]),
        number["longest_rigid_tip_mm"],
        None if passes is None else bool(passes),
        number["bend_radius_mm"],
        number["passable_radius_mm"],
        number["needed_lumen_mm"],
    )
