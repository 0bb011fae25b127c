"""Every published value that the formulas are held against, one test a row."""

from collections import Counter

import pytest

from optics.published import _row, check, half_unit, rows
from optics.spec import OutOfRange

ROWS = rows()


def _param(row):
    marks = [pytest.mark.xfail(reason=row.differs, strict=True)] if row.differs else []
    return pytest.param(row, id=row.name, marks=marks)


@pytest.mark.parametrize("row", [_param(row) for row in ROWS])
def test_row(row):
    checked = check(row)
    assert checked.met, f"{row.name}: got {checked.got!r}, allowed {row.tolerance:g}"


def test_there_are_enough_rows_of_others():
    """Remembered numbers are counted apart."""
    kept = [row for row in ROWS if row.basis != "remembered"]
    assert len(kept) >= 20
    assert len({row.source for row in kept}) >= 8


def test_a_wider_tolerance_has_a_reason():
    for row in ROWS:
        assert row.tolerance <= half_unit(row.printed) * 1.000001 or row.because


def test_no_row_stands_twice():
    again = [
        name
        for name, count in Counter(
            (row.source, row.quantity, str(row.given), row.field, row.item) for row in ROWS
        ).items()
        if count > 1
    ]
    assert not again


def test_half_a_unit_of_the_last_digit():
    assert half_unit("12.50") == pytest.approx(0.005)
    with pytest.raises(OutOfRange, match="needs a reason"):
        _row({"quantity": "x", "printed": "1.0", "tolerance": 0.1}, "trade", "here")
