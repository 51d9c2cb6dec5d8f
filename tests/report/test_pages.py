"""Pages as files: names that every file system takes, and nothing that overwrites anything."""

import json

import pytest
from page_samples import CONJECTURES, NAMES, TAGS, Seen, document, hostile_record, outcomes, powers

from conjcheck.evidence.source import rule_hash
from conjcheck.report.html import page
from conjcheck.report.pages import document_of_record_file, documents_of, now, page_name, record_beside, write_pages
from conjcheck.testing.outcome import no_verdict


@pytest.mark.parametrize(
    ("file", "name", "expected"),
    [
        ("conjectures/rim_hooks.py", "rim_hooks", "rim_hooks"),
        ("conjectures/bounds.py", "at_most", "bounds.at_most"),
        ("records/at_most.json", "another", "at_most"),
        ("", "x/../../y", "x_.._.._y"),
        ("", "..", "_"),
        ("", "\u05e9", "\u05e9"),
    ],
)
def test_names(file, name, expected):
    """A page is named after its file and conjecture, without anything that leads elsewhere."""
    assert page_name(file, name) == expected


def test_names_are_not_too_long():
    """A name of thousands of letters is cut."""
    assert len(page_name("", "x" * 5000)) < 200


def test_every_page_gets_a_file(tmp_path):
    """Documents of one name get files of their own, an index is never overwritten, each document lies beside its page."""
    twice = [document("agrees"), document("agrees"), document("agrees") | {"file": "", "name": "index"}, *map(document, NAMES)]
    pages = write_pages(tmp_path / "new" / "folder", twice)
    assert len(set(pages)) == len(twice)
    assert "index.html" not in {path.name for path in pages}
    for path, made in zip(pages, twice, strict=True):
        assert path.read_text(encoding="utf-8").startswith("<!doctype html>")
        assert json.loads((path.parent / f"{path.name.removesuffix('.html')}.json").read_text(encoding="utf-8")) == made


def test_outcomes_of_one_conjecture_belong_together():
    """Outcomes are grouped by file and name, in the order in which they came; each document knows the hash of its rule."""
    mixed = [part for pair in zip(outcomes("agrees"), outcomes("agrees"), strict=True) for part in pair] + outcomes("lantern")
    made = documents_of(mixed, made="now")
    assert [(d["name"], len(d["parts"])) for d in made] == [("powers", 2 * len(outcomes("agrees"))), ("lantern_rule", 1)]
    assert made[1]["rule"] == rule_hash(outcomes("lantern")[0]["file"])
    assert made[1]["record"]["status"] == "refuted"
    assert made[0]["record"] is None
    assert documents_of([outcomes("agrees")[1] | {"rule_hash": ""}])[0]["rule"] == ""


def test_the_record_beside(tmp_path):
    """A record is found beside the plug-in; one that is no JSON object is not taken for none; no name leads elsewhere."""
    (tmp_path / "records").mkdir()
    (tmp_path / "records" / "a.json").write_text('{"x": 1}')
    (tmp_path / "records" / "b.json").write_text("{{{")
    file = str(tmp_path / "rule.py")
    assert record_beside(file, "a") == {"x": 1}
    assert record_beside(file, "b") == {}
    assert record_beside(file, "c") is None
    assert record_beside(file, "../records/a") is None
    assert record_beside(file, TAGS) is None


def test_now_sorts():
    """The date begins with the year."""
    assert now()[:2] == "20"
    assert now().endswith(" UTC")


def test_a_stale_record_is_said_to_be_stale(tmp_path):
    """Coverage of another version of the rule counts no more, and the page says so; a record that is none, too."""
    (tmp_path / "rule.py").write_text("x = 1")
    (tmp_path / "records").mkdir()
    covered = {"space": "Gr(1,3)", "rows": 9, "seen": 9, "of": 9, "cases": 9, "nonzero": 9, "failing": 0, "seconds": 1}
    plain = {"format": "conjcheck-record", "version": 1, "conjecture": "powers", "status": "open", "counterexamples": []}
    run = [outcomes("agrees")[1] | {"file": str(tmp_path / "rule.py"), "rule_hash": rule_hash(tmp_path / "rule.py")}]
    path = tmp_path / "records" / "powers.json"
    for rule, stale in (("sha256:" + "0" * 64, True), (rule_hash(tmp_path / "rule.py"), False)):
        path.write_text(json.dumps(plain | {"rule": rule, "coverage": [covered | {"engine": "e", "conjcheck": "0"}]}))
        (made,) = documents_of(run)
        assert ("another version of the rule" in made["record"]["stale"]) == stale
        assert ("another version of the rule" in page(made)) == stale
    path.write_text("{{{")
    (made,) = documents_of(run)
    assert made["record"]["problem"]
    assert "The record cannot be read" in page(made)


@pytest.mark.parametrize("name", ["lantern_rule", "step_puzzles", "cayley_plane_constants_at_most_three"])
def test_a_record_gets_the_product_of_the_oracle(name):
    """The page of a record shows the true product, computed now; in a classical ring without powers of q; and nothing by the rule."""
    data = json.loads((CONJECTURES / "records" / f"{name}.json").read_text(encoding="utf-8"))
    made = document_of_record_file(data, file="x.json")
    products = made["failure"]["products"]
    examined = {"lantern_rule": "lantern", "step_puzzles": "puzzles"}.get(name, "cayley")
    assert products["oracle"] == document(examined)["failure"]["products"]["oracle"]
    assert products["rule"] is None
    assert not [note for note in made["notes"] if "wrong" in note]


def test_a_record_is_not_believed():
    """A value on record that is not the oracle's is said to be wrong."""
    found = {
        "where": "Gr(3,5): (2) * (2,1) -> (), q^(1)",
        "rule": 1,
        "oracle": 5,
        "minimal": True,
        "rule_hash": "sha256:" + "0" * 64,
    }
    data = hostile_record() | {"counterexamples": [found]}
    made = document_of_record_file(data, file="x.json")
    assert "the record is wrong: the oracle gives 0 there, not 5" in made["notes"]
    assert "the record is wrong" in Seen(page(made)).text


def test_a_part_without_verdict_has_no_counterexample():
    """A part that ended without a verdict says why, and shows no place where anything failed."""
    line = no_verdict(powers, "survey", "RecordError: stale record")
    (made,) = documents_of([*outcomes("agrees"), line])
    text = Seen(page(made)).text
    assert made["failure"] is None
    assert "no verdict" in text
    assert "RecordError: stale record" in text
    assert "Where it went wrong" not in text
    assert "Agreement is not a proof" not in text
