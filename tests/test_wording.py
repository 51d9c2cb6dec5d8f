"""Numbers with their nouns."""

import pytest

from conjcheck.wording import counted


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
