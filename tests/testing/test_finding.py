"""Findings and the exceptions that carry them."""

import traceback

import pytest

from conjcheck import Case, Row
from conjcheck.testing.finding import STATUSES, Finding, Found, raise_finding

CASE = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")


def test_row_of_a_finding():
    """A finding at a case lies in the row of the case, one at a row in that row."""
    assert Finding("refuted", CASE, 2, 1).row == CASE.row
    assert Finding("crashed", CASE.row).row == Row.parse("Gr(2,4): (2,1) * (2,1)")


def test_one_class_and_line_per_status():
    """Each status is raised as a class of its own from a line of its own: Hypothesis tells failures apart by these."""
    kinds, lines = set(), set()
    for status in STATUSES[1:]:
        finding = Finding(status, CASE, detail="why")
        with pytest.raises(Found) as caught:
            raise_finding(finding)
        assert caught.value.finding is finding
        assert str(caught.value) == f"{status}: {CASE} why"
        kinds.add(type(caught.value))
        lines.add(traceback.extract_tb(caught.value.__traceback__)[-1].lineno)
    assert len(kinds) == len(lines) == len(STATUSES) - 1 == 7
