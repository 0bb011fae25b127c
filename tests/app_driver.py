"""Driving the app in process: open it, press things, read what it shows."""

import base64
import json
import zlib
from contextlib import nullcontext
from pathlib import Path
from unittest.mock import patch

from streamlit.testing.v1 import AppTest

from optics import presets
from optics.ui import pictures

BLANK = '<svg xmlns="http://www.w3.org/2000/svg" width="4" height="4"></svg>'
APP = Path(__file__).resolve().parents[1] / "app.py"
DEMO = presets.open("gearbox_tooth").document
LENGTH, DIAMETER = "guide.bundle.length_m", "guide.bundle.diameter_mm"


def opened(drawn: bool = False, **query: str) -> AppTest:
    app = AppTest.from_file(str(APP), default_timeout=30)
    for key, text in query.items():
        app.query_params[key] = text
    return ran(app, drawn)


def ran(app: AppTest, drawn: bool = False) -> AppTest:
    """One run; with blank sheets for pictures unless they are what is tested, since drawing takes most of the time."""
    with nullcontext() if drawn else patch.object(pictures, "_picture", lambda *_: BLANK):
        app.run()
    assert not app.exception, app.exception[0].message
    return app


def put(app: AppTest, path: str, value: float) -> AppTest:
    app.number_input(key=path).set_value(value)
    return ran(app)


def click(app: AppTest, key: str) -> AppTest:
    app.button(key=key).click()
    return ran(app)


def report(app: AppTest):
    return app.session_state["sketch"].report


def shown(app: AppTest) -> dict[str, str]:
    return {item.label: item.value for item in app.metric}


def unpacked(text: str) -> list:
    """The content of a link, by the standard library alone."""
    return json.loads(zlib.decompress(base64.urlsafe_b64decode(text + "=" * (-len(text) % 4))))
