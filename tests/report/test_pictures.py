"""Pictures hold what they show: boxes, dots, beads, and the same in words."""

from xml.etree import ElementTree as ET

import pytest

from conjcheck import IG, LG, OG, Fl, FlagVariety, Gr
from conjcheck.report.pictures import pictures_of


def drawn(u):
    """The pictures of a class, parsed."""
    return [ET.fromstring(text) for text in pictures_of(u, "u", "key")]


def count(svg, cls):
    """How many shapes of a class a picture has."""
    return sum(element.get("class") == cls for element in svg.iter())


@pytest.mark.parametrize(
    "X", [Gr(2, 5), Fl(3), Fl(1, 3, n=4), LG(3, 6), OG(3, 7), OG(4, 8), IG(2, 6), FlagVariety("E6/P1"), FlagVariety("G2/B")]
)
def test_every_picture_has_words(X):
    """Every class of every kind of space has a picture, with a title and a description that the picture refers to."""
    for u in X.classes:
        found = drawn(u)
        assert found
        for svg in found:
            assert svg.get("role") == "img"
            texts = {element.get("id"): element.text for element in svg if element.tag in ("title", "desc")}
            assert list(texts) == [svg.get("aria-labelledby"), svg.get("aria-describedby")]
            assert all(texts.values())


def test_boxes_are_counted():
    """Diagrams have as many boxes as the class is long: Young, shifted, Rothe; heaps as many pieces."""
    for X, cls in ((Gr(2, 5), "box"), (LG(3, 6), "box"), (OG(4, 8), "box"), (Fl(4), "box"), (FlagVariety("E6/P1"), "bead")):
        for u in X.classes:
            assert count(drawn(u)[0], cls) == u.length


def test_a_young_diagram():
    """(2,1) in Gr(2,4): three boxes at their places, in words too."""
    (young, string) = drawn(Gr(2, 4).schubert(partition=(2, 1)))
    places = {(int((float(e.get("y")) - 6) / 22), int((float(e.get("x")) - 6) / 22)) for e in young if e.get("class") == "box"}
    assert places == {(0, 0), (0, 1), (1, 0)}
    assert young[1].text == "rows of 2, 1 boxes, inside 2 rows and 2 columns"
    assert [e.text for e in string if e.tag == "text"] == ["1", "0", "1", "0"]


def test_a_shifted_diagram():
    """(3,1) on LG(3,6): the second row begins one box further to the right."""
    (svg,) = drawn(LG(3, 6).schubert(partition=(3, 1)))
    places = {(int((float(e.get("y")) - 6) / 22), int((float(e.get("x")) - 6) / 22)) for e in svg if e.get("class") == "box"}
    assert places == {(0, 0), (0, 1), (0, 2), (1, 1)}


def test_a_rothe_diagram():
    """2143 has the boxes (1,1) and (3,3), and dots at its values."""
    svg = drawn(Fl(4).schubert(permutation=(2, 1, 4, 3)))[0]
    assert "boxes (row, column): (1,1), (3,3)" in svg[1].text
    assert count(svg, "dot") == 4


def test_a_heap():
    """A piece of a heap rests on the earlier ones that it does not commute with, and only on the nearest."""
    X = FlagVariety("E6/P1")
    (svg,) = drawn(X.schubert(word=(2, 5, 4, 3, 1)))
    beads = [float(e.get("cy")) for e in svg if e.get("class") == "bead"]
    assert len(set(beads)) == 4, "2 and 5 commute and stand side by side"
    lines = [e for e in svg if e.get("class") == "line"]
    assert len(lines) == 1 + 4, "the floor, and 1-3, 3-4, 4-2, 4-5"


def test_too_large_is_not_drawn():
    """Nothing is drawn where nobody could read it."""
    assert pictures_of(Gr(1, 60).point, "u", "key") == []


def test_letters_beyond_nine():
    """Strings with more than ten steps have letters."""
    X = Fl(*range(1, 12), n=13)
    assert X.number_of_classes > 50_000
    small = Fl(1, 2, 3, n=5).point
    assert [e.text for e in drawn(small)[1] if e.tag == "text"] == list(small.string)
