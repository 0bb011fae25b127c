"""The few lines of style that the theme file cannot say: two widths of the light strip, quiet marks, print."""

import streamlit as st

STYLE = """
<style>
.st-key-strip-narrow, .st-key-view-narrow { display: none; }
@media (max-width: 640px) {
  .st-key-strip-wide, .st-key-view-wide { display: none; }
  .st-key-strip-narrow, .st-key-view-narrow { display: block; }
}
[data-testid="stTabPanel"] [data-testid="stImage"] { max-width: 640px; }
[data-testid="stTabPanel"] .st-key-view-wide [data-testid="stImage"] { max-width: 960px; }
[data-testid="stSliderTickBar"] { display: none; }
[data-testid="stSliderThumbValue"] { opacity: 0; }
[data-testid="stSlider"]:is(:hover, :focus-within) [data-testid="stSliderThumbValue"] { opacity: 1; }
@media (hover: hover) {
  :is([data-testid="stWidgetLabel"], [data-testid="stMetricLabel"]) [data-testid="stTooltipIcon"] { opacity: 0.25; }
  :is([data-testid="stWidgetLabel"], [data-testid="stMetric"]):hover [data-testid="stTooltipIcon"] { opacity: 1; }
}
@media print {
  [data-testid="stSidebar"], [data-testid="stHeader"], [data-testid="stToolbar"], button { display: none !important; }
}
</style>
"""


DIMMED = "<style>.st-key-answer { opacity: 0.5; }</style>"


def apply() -> None:
    st.html(STYLE)


def dim(answer_is_old: bool) -> None:
    """Show the last good answer paler while the present design cannot be sized."""
    st.html(DIMMED if answer_is_old else "<style></style>")
