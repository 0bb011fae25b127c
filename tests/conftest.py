"""What several tests need: the demo document, and designs drawn at random."""

from functools import lru_cache

import pytest
from random_designs import first_valid

from optics import presets


@pytest.fixture(scope="session")
def document():
    return presets.open("gearbox_tooth").document


@pytest.fixture(scope="session")
def random_designs(document):
    """A function: the first `count` valid random designs."""
    return lru_cache(lambda count: first_valid(document, count))
