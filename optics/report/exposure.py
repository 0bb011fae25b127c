"""The screening of optical radiation, as lines with their words."""

import dataclasses

from optics.chain.evaluate import Figures
from optics.chain.screen import PREFIX
from optics.fiberscope import Fiberscope
from optics.report.answer import ExposureLine
from optics.scene.caution import lines
from optics.scene.exposure import Screening


def exposure(fiberscope: Fiberscope, figures: Figures, row: int) -> tuple[ExposureLine, ...]:
    """Every line of the screening for one design."""
    names = [field.name for field in dataclasses.fields(Screening)]
    found = Screening(**{name: figures.value[PREFIX + name] for name in names})
    return tuple(
        ExposureLine(line.name, line.value, line.unit, line.limit, line.because)
        for line in lines(screening=found, at=row, setting=fiberscope.setting)
    )
