"""What the page of the detail is made of: the answer, the simulated view, what limits, what would help, the viewer's numbers."""

from dataclasses import replace
from typing import Any

import streamlit as st

from optics import presets
from optics.fiberscope import Fiberscope
from optics.figures import detail as detail_figures
from optics.figures import export, image
from optics.figures import view as view_figure
from optics.figures.palette import DARK, LIGHT
from optics.report.answer import Report
from optics.report.picture import view_of
from optics.spec import OutOfRange
from optics.study import sharper, sharper_curves, sharper_helps, sharper_places
from optics.ui import headline, pictures, rows, sketch
from optics.ui.binding import bound_to
from optics.ui.detail_words import (
    crack_words,
    first_words,
    help_words,
    helped,
    place_rows,
    smoothing,
    viewer_rows,
    viewer_words,
)
from optics.ui.names import field_name
from optics.ui.sketch import Sketch
from optics.ui.words import number, plain
from optics.viewer.subjects import SUBJECTS

NEEDS = ("smallest_gap_mm", "smallest_line_mm", "frame_hz", "field_of_view_deg")
# What the view is drawn with; kept while the app is open, no part of the design.
STARTS: dict[str, Any] = {"subject": "bars", "zoom": 1, "smooth": None, "noise": True, "seed": 1, "crack": None}
ZOOMS, SMOOTHS = (1, 2, 4, 8), (None, 0.3, 0.1, 0.03, 0.01, 0.003)
WIDE_IN, NARROW_IN, PANEL_IN = 7.4, 3.3, 2.45
PIXELS, MOST_PIXELS = 640, 1800  # across the view, at zoom 1 and at most
DPI = 150
STYLE = """<style>
.st-key-view-narrow { display: none; }
.st-key-chart [data-testid="stImage"] { max-width: 640px; }
@media (max-width: 640px) { .st-key-view-wide { display: none; } .st-key-view-narrow { display: block; } }
</style>"""
