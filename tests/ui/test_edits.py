"""Editing the document and its link, without the app around it."""

import itertools
import random

import pytest

from optics import presets
from optics.fiberscope import FORMS
from optics.presets import value_at
from optics.spec import OutOfRange
from optics.tables import preset_names
from optics.ui import edits, link, shape, sketch
from optics.ui.titles import PARTS

DEMO = presets.open("gearbox_tooth").document


def test_links_of_odd_content_are_refused_never_raised():
    odd = [[], {}, "x", True, 10**400, -1, {"a": {"b": [1]}}, [1, [2]], [[[]]], "solve"]
    paths = ("source", "image.form", "guide.bundle", "guide.bundle.bends.0.radius_mm", "kind", "x.y")
    for path, value in itertools.product(paths, odd):
        with pytest.raises(OutOfRange, match=r"^[^\n]+\.$"):
            sketch.from_link(link.written("gearbox_tooth", {path: value}))


@pytest.mark.parametrize("path", FORMS)
def test_each_form_of_a_table_can_be_sized(path):
    for form in FORMS[path]:
        document = edits.with_form(DEMO, path, form)
        assert presets.resolve(document).fiberscope
        assert presets.edited(DEMO, link.differences(DEMO, document)) == document


def test_each_optional_table_can_be_added_and_taken_away():
    for part in PARTS:
        for path, _ in shape.absent(DEMO, part):
            document = edits.with_table(DEMO, path)
            assert presets.resolve(document).fiberscope
            assert edits.without_table(document, path) == DEMO


def test_differences_bring_any_document_about():
    draw = random.Random(5)
    names = [name for name in preset_names("fiberscopes")]
    for _ in range(40):
        base, other = (presets.open(draw.choice(names)).document for _ in range(2))
        for path in draw.sample([path for path in FORMS if value_at(other, path)], 2):
            other = edits.with_form(other, path, draw.choice(list(FORMS[path])))
        assert presets.edited(base, link.differences(base, other)) == other
