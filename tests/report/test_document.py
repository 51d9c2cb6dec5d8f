"""Documents: one plain form for runs and records, whatever the input."""

import json

import pytest
from page_samples import HALF, NAMES, TAGS, TURNED, document, hostile_outcome, hostile_record, outcomes

from conjcheck.report.document import WORDS, document_of_outcomes, document_of_record, is_outcome, scope_of_spaces, visible
from conjcheck.testing.finding import STATUSES


@pytest.mark.parametrize("name", NAMES)
def test_a_document_is_plain_json(name):
    """A document goes through JSON and comes back as it was, and all documents have the same keys."""
    made = document(name)
    assert json.loads(json.dumps(made)) == made
    assert set(made) == set(document("agrees"))


def test_every_status_has_words():
    """No status of an examination is without words."""
    assert set(STATUSES) <= set(WORDS)


def test_one_part_that_fails_decides():
    """A document agrees only if all of its parts agree; the part that failed after the most cases is shown."""
    parts = outcomes("agrees")
    assert document_of_outcomes(parts)["status"] == "agrees"
    assert document_of_outcomes(parts)["failure"] is None
    bad = outcomes("crashed")[0]
    for order in ([*parts, bad], [bad, *parts]):
        made = document_of_outcomes(order)
        assert made["status"] == "crashed"
        assert made["failure"]["where"] == bad["where"]
    no_verdict = {"conjecture": "x", "part": "survey", "status": "no verdict", "verdict": "no verdict: x", "scope": "it ended"}
    assert document_of_outcomes([*parts, no_verdict])["status"] == "no verdict"


def test_no_outcome_is_no_document():
    """Nothing makes no document, and surely no agreement."""
    with pytest.raises(ValueError, match="at least one outcome"):
        document_of_outcomes([])


def test_the_failure_is_whole():
    """The refuted document holds both values, both products, kinds, the layer and what is smaller."""
    failure = document("lantern")["failure"]
    assert (failure["where"], failure["rule"], failure["oracle"]) == ("Gr(3,5): (2) * (2,1) -> (), q^(1)", 1, 0)
    assert failure["products"]["rule"]["terms"] == [{"w": "(2,2,1)", "d": [0], "n": 1}, {"w": "()", "d": [1], "n": 1}]
    assert failure["products"]["oracle"]["terms"] == [{"w": "(2,2,1)", "d": [0], "n": 1}]
    assert failure["layer"]["pairs"] == 2
    assert failure["minimality"] == "minimal: all 64 smaller cases agree"
    assert failure["kinds"] == ["overcount", "support"]


def test_spaces_come_one_by_one():
    """The coverage names each space with the rows passed and all rows."""
    spaces = document("lantern")["spaces"]
    assert [(s["space"], s["seen"], s["of"]) for s in spaces][-2:] == [("Gr(2,5)", 100, 100), ("Gr(3,5)", 31, 100)]
    assert len(spaces) == 10


def test_a_record_alone():
    """From a record come status, counterexample, coverage, samples and certificate, and a note that nothing was computed again."""
    made = document("record")
    assert (made["status"], made["minimal"], made["failure"]["where"]) == ("refuted", True, "Gr(2,5): (2) * (2,1) -> (), q^(1)")
    assert made["record"]["counterexamples"][0]["certificate"] == "<script>alert(3).json"
    assert made["record"]["samples"][0]["seed"] == "3"
    assert "the first 31 of 100 rows of Gr(2,5)" in made["scope"]
    assert "from the record alone" in made["notes"][0]


def test_a_record_of_a_repaired_rule():
    """A counterexample to another version of the rule, or to one not named, is a note, and no counterexample to this one."""
    data = hostile_record()
    for version, who in (
        ("sha256:" + "1" * 64, "an earlier version"),
        (None, "a version of the rule that the record does not name"),
    ):
        made = document_of_record(data | {"counterexamples": [data["counterexamples"][0] | {"rule_hash": version}]})
        assert (made["status"], made["failure"]) == ("open", None)
        assert made["notes"][1].startswith(who)
        assert "was refuted at Gr(2,5): (2) * (2,1) -> (), q^(1)" in made["notes"][1]
        assert made["record"]["counterexamples"][0]["earlier"]


def test_an_open_record_is_not_called_agreement():
    """Without a counterexample a record is open, with what was compared."""
    made = document_of_record(hostile_record() | {"status": "open", "counterexamples": []})
    assert made["status"] == "open"
    assert made["failure"] is None
    assert made["verdict"].startswith("open: the first 31 of 100 rows")


@pytest.mark.parametrize("data", [{}, [], None, "text", 7, {"format": "conjcheck-record", "version": 1, "conjecture": TAGS}])
def test_what_is_no_record_is_shown_as_such(data):
    """Anything else makes a document that says what is wrong and shows what is there."""
    made = document_of_record(data, file="a/b.json")
    assert made["status"] == "unreadable"
    assert "expected" in made["problem"]
    assert made["source"]
    assert made["name"] in (TAGS, "b")


def test_types_are_not_believed():
    """Wrong types become empty texts and zeros; nothing is lost that is a text."""
    made = document_of_outcomes([hostile_outcome()])
    assert made["parts"][0]["cases"] == 0
    assert made["about"]["contributors"] == []
    assert made["about"]["references"][1] == "7"
    assert made["failure"]["oracle"].startswith("[")
    assert made["failure"]["layer"]["pairs"] == 0
    assert len(made["failure"]["products"]["rule"]["terms"]) == 1


def test_what_cannot_be_seen_is_named():
    """Control characters, halves of characters and marks of direction are shown by their number; letters stay."""
    assert visible(TURNED) == "\u05e9\u05dc\u05d5\u05dd [U+202E]turned[U+202C] \u0627\u0644"
    assert visible(HALF) == "[U+D800][U+0000][U+0007]"
    assert visible("two\nlines\tand é") == "two\nlines\tand é"


def test_very_long_texts_are_cut():
    """A text of a million letters is cut, and says how much is missing."""
    made = document_of_outcomes([outcomes("agrees")[1] | {"scope": "x" * 1_000_000}])
    assert made["scope"].endswith("... (980,000 more characters)")


def test_is_outcome():
    """An outcome is known by its keys, and a record is none."""
    assert is_outcome(outcomes("agrees")[1])
    assert not is_outcome(hostile_record())
    assert not is_outcome([])


def test_scope_of_spaces():
    """Complete spaces first, then parts; nothing at all is nothing."""
    whole = {"space": "Gr(1,2)", "seen": 4, "of": 4, "rows": 4, "cases": 5}
    part = {"space": "Gr(1,3)", "seen": 2, "of": 9, "rows": 2, "cases": 3}
    assert scope_of_spaces([]) == ""
    assert scope_of_spaces([{"space": "Gr(1,2)", "drawn": True}]) == ""
    assert scope_of_spaces([whole, part]) == "all of Gr(1,2) and the first 2 of 9 rows of Gr(1,3); 6 rows, 8 cases"
    assert scope_of_spaces([whole, whole | {"space": "Fl(3)"}]) == "all of 2 spaces, Gr(1,2) to Fl(3); 8 rows, 10 cases"
    assert "parts of 1 more space" in scope_of_spaces([part, part, part])
    assert scope_of_spaces([whole | {"failing": 2}]) == "all of Gr(1,2); 4 rows, 5 cases; it fails at 2 cases"
