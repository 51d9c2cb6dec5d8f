"""Numbers with their nouns, and tables in columns."""

import pytest

from conjcheck.wording import aligned, counted


@pytest.mark.parametrize(
    ("given", "words"),
    [
        ((1, "row"), "1 row"),
        ((0, "case"), "0 cases"),
        ((1234, "class", "classes"), "1,234 classes"),
        ((1, "class", "classes"), "1 class"),
    ],
)
def test_counted(given, words):
    """One of a thing is in the singular, everything else in the plural, thousands apart."""
    assert counted(*given) == words


def test_aligned():
    """Columns have one width, on the left or on the right; the last one is not filled up on the left side."""
    lines = [("a", "1", "short"), ("long", "23", "x")]
    assert aligned(lines, right={1}) == [["a   ", " 1", "short"], ["long", "23", "x"]]
    assert aligned(lines, right={2}) == [["a   ", "1 ", "short"], ["long", "23", "    x"]]
    assert aligned([]) == []
