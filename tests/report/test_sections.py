"""The sections as plain values: nothing is called a difference that is none, and nothing agreed that was not compared."""

from conjcheck.geometry.case import Case
from conjcheck.report.sections import cells, diagnosis, layer_words, products

PLACE = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")


def side(*terms, more=0):
    """A product as it stands in a document."""
    return {"terms": [{"w": w, "d": [d], "n": n} for w, d, n in terms], "more": more}


def test_terms_are_matched_and_ordered():
    """Terms of both sides meet in one row, in the order of cases, with 0 where a side has none."""
    found = products({"rule": side(("(1,1)", 1, 1)), "oracle": side(("(1,1)", 1, 1), ("(2)", 1, 1)), "partial": False}, PLACE)
    assert [(row["w"], row["rule"], row["oracle"], row["differs"]) for row in found["shown"]] == [
        ("(2)", 0, 1, True),
        ("(1,1)", 1, 1, False),
    ]
    assert found["both"]


def test_one_side_alone_differs_from_nothing():
    """A claim has only the oracle's product: no term differs."""
    found = products({"rule": None, "oracle": side(("(2)", 1, 1)), "partial": False}, PLACE)
    assert (found["has_rule"], found["both"], found["differing"]) == (False, False, [])


def test_words_of_a_layer():
    """One is not many; what is not complete is "at least"."""
    plain = {"pairs": 1, "cases": 1, "orbits": 1, "rows": 3, "size": 9, "complete": True, "all_orbits": True}
    assert layer_words(plain) == (
        "In the smallest failing space it fails at 1 ordered pair (u, v) of 9: 1 failing case in 1 orbit under the symmetries of the space."
    )
    part = layer_words(plain | {"complete": False, "all_orbits": False, "cases": 2})
    assert "at least: 2 failing cases in at least 1 orbit" in part
    assert "among the 3 rows looked at" in part
    rows = layer_words(plain | {"pairs": 8, "cases": 0, "orbits": 2})
    assert rows.endswith("at 8 ordered pairs (u, v) of 9: 8 failing rows in 2 orbits under the symmetries of the space.")


def test_a_failing_space_is_never_called_agreed():
    """The space of the failure fails, whatever its numbers; and it has a cell even if no survey came there."""
    whole = {"space": "Gr(2,4)", "seen": 36, "of": 36, "rows": 36, "cases": 9, "drawn": False, "out_of_reach": False, "failing": 0}
    plain = {"about": {"ring": "quantum"}, "failure": None}
    document = {"status": "refuted", "spaces": [whole], **plain}
    assert [cell["kind"] for cell in cells(document, PLACE)] == ["failed"]
    assert [(cell["space"], cell["kind"]) for cell in cells({"status": "refuted", "spaces": [], **plain}, PLACE)] == [
        ("Gr(2,4)", "failed")
    ]
    assert [cell["kind"] for cell in cells({"status": "agrees", "spaces": [whole], **plain}, None)] == ["whole"]
    assert [cell["kind"] for cell in cells({"status": "agrees", "spaces": [whole | {"failing": 1}], **plain}, None)] == ["failed"]


def test_the_map_by_degree():
    """On Gr(2,4), |d| goes up to 2: a complete space agrees at all, a failing one fails where the layer says, a part is open."""
    about, layer = {"ring": "quantum"}, {"failures": [{"where": "Gr(2,4): (2) * (2) -> (), q^(1)"}], "complete": True}
    space = {"space": "Gr(2,4)", "seen": 36, "of": 36, "rows": 36, "cases": 9, "drawn": False, "out_of_reach": False, "failing": 0}

    def signs(document, place=None):
        return [cell["degrees"] for cell in cells({"about": about, "failure": None, **document}, place)]

    assert signs({"status": "agrees", "spaces": [space]}) == ["=0 =1 =2"]
    assert signs({"status": "agrees", "spaces": [space | {"seen": 35}]}) == ["?0 ?1 ?2"]
    refuted = {"status": "refuted", "spaces": [space]}
    assert signs({**refuted, "failure": {"layer": layer}}, PLACE) == ["=0 \N{NOT EQUAL TO}1 =2"]
    assert signs({**refuted, "failure": {"layer": layer | {"complete": False}}}, PLACE) == ["?0 \N{NOT EQUAL TO}1 ?2"]
    assert signs({**refuted, "failure": {"layer": None}}, PLACE) == ["?0 ?1 ?2"]
    assert signs({"status": "agrees", "spaces": [space], "about": {"ring": "classical"}}) == ["=0"]
    assert signs({"status": "agrees", "spaces": [space | {"space": "no space"}]}) == [""]


def test_a_diagnosis_of_any_shape():
    """A diagnosis is shown as far as it is one."""
    assert diagnosis(None) is None
    assert diagnosis([1]) is None
    found = diagnosis({"failing": 3, "conditions": [{"words": "w", "failing": 2}, 7], "suggestion": {"premise": "p"}, "firsts": 5})
    assert found["words"] == ["Looked at: 3 failing and ? agreeing cases."]
    assert found["conditions"] == [{"words": "w", "expression": "", "failing": "2", "agreeing": "?", "informative": "?"}]
    assert found["suggestion"]["premise"] == "p"
    assert found["firsts"] == []
    assert diagnosis({"failing": 3, "agreeing": 2, "by_rows": True})["words"] == ["Looked at: 3 failing and 2 agreeing rows."]
