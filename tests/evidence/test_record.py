"""Records: sorted, readable, and believed in nothing."""

import importlib.util
import json
import os
import stat
import tempfile
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from making import HASH, OTHER_HASH, records

from conjcheck import Case, FlagVariety, Row
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import RecordError
from conjcheck.evidence.record import (
    Counterexample,
    Covered,
    Record,
    Sample,
    current_record,
    merge,
    read_record,
    read_record_file,
    record_path,
    record_text,
    stale_words,
    write_record,
    write_record_file,
)
from conjcheck.evidence.source import rule_hash

CASE = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")
SMALLER = Case.parse("Gr(1,3): (1) * (1) -> (2), q^(0)")
ROW = Row.parse("Fl(3): [132] * [321]")


@pytest.fixture
def rule(tmp_path):
    """A conjecture written in a file of its own."""
    path = tmp_path / "plugin.py"
    path.write_text("from conjcheck import *\n\n@candidate(on=Grassmannians())\ndef my_rule(X, u, v):\n    return {}\n")
    spec = importlib.util.spec_from_file_location("plugin", path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module.my_rule


def test_where_it_is_kept(rule, tmp_path):
    """The record lies in the folder ``records`` beside the plug-in, under the name of the conjecture."""
    assert record_path(rule) == tmp_path / "records" / "my_rule.json"


def test_without_a_file(rule, tmp_path):
    """Without a file the record is open and empty; reading creates nothing."""
    assert read_record(rule) == Record("my_rule", "open", ())
    assert list(tmp_path.glob("records*")) == []


def test_written_and_read(rule):
    """What is written is read back the same: cases and rows, with and without values."""
    record = Record(
        "my_rule", "refuted", (Counterexample(CASE, 0, 1, minimal=False), Counterexample(ROW, None, None, minimal=True))
    )
    assert write_record(rule, record) == record_path(rule)
    assert read_record(rule) == record
    write_record(rule, Record("my_rule", "open", ()))
    assert read_record(rule) == Record("my_rule", "open", ())


P2 = Covered(FlagVariety("Gr(1,3)"), 9, 9, 12, 10, seconds=0.25, engine="recursion", conjcheck="0.1.0")
TEXT = """{
  "format": "conjcheck-record",
  "version": 1,
  "conjecture": "my_rule",
  "status": "refuted",
  "file": null,
  "statement": "",
  "ring": "quantum",
  "premise": false,
  "rule": "%s",
  "coverage": [
    {"space": "Gr(1,3)", "rows": 9, "seen": 9, "of": 9, "cases": 12, "nonzero": 10, "failing": 0, "seconds": 0.25, "engine": "recursion", "conjcheck": "0.1.0"}
  ],
  "samples": [],
  "counterexamples": [
    {
      "where": "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)",
      "rule": 0,
      "oracle": 1,
      "minimal": true,
      "certificate": null,
      "instead": null,
      "rule_hash": null
    }
  ]
}
"""  # noqa: E501


def test_the_text(rule):
    """The file is JSON with one line per fact and per space, ending in a newline, the same for the same record."""
    found = Counterexample(CASE, 0, 1, minimal=True)
    record = Record("my_rule", "refuted", (found,), ring="quantum", premise=False, rule=HASH, coverage=(P2,))
    text = write_record(rule, record).read_text(encoding="utf-8")
    assert text == record_text(record) == TEXT % HASH
    assert write_record(rule, record).read_text(encoding="utf-8") == text


def test_one_more_counterexample():
    """A new counterexample refutes, is put in order, and replaces one at the same place; a larger one is not minimal any more."""
    record = Record("r", "open", ()).with_counterexample(Counterexample(CASE, 0, 1, minimal=True))
    record = record.with_counterexample(Counterexample(SMALLER, 0, 1, minimal=True))
    assert [c.minimal for c in record.counterexamples] == [True, False]
    assert record.status == "refuted"
    assert [c.where for c in record.counterexamples] == [SMALLER, CASE]
    again = record.with_counterexample(Counterexample(CASE, 5, 1, minimal=False))
    assert [(c.where, c.rule) for c in again.counterexamples] == [(SMALLER, 0), (CASE, 5)]
    with_row = again.with_counterexample(Counterexample(CASE.row, None, None, minimal=False))
    assert [c.where for c in with_row.counterexamples] == [SMALLER, CASE.row, CASE]


def test_a_record_of_another_conjecture(rule):
    """A record under the name of another conjecture is not believed."""
    path = record_path(rule)
    path.parent.mkdir()
    path.write_text(record_text(Record("other", "open")), encoding="utf-8")
    with pytest.raises(RecordError, match="expected the record of 'my_rule', got that of 'other'"):
        read_record(rule)
    assert read_record_file(path).conjecture == "other"


def test_a_folder_in_its_place(rule):
    """A folder, or a link that leads nowhere, is not taken for a record, and not for none either."""
    record_path(rule).mkdir(parents=True)
    with pytest.raises(RecordError):
        read_record(rule)


def test_a_certificate_is_kept():
    """Looking again at a counterexample loses no certificate, unless the values have changed."""
    record = Record("r", "refuted", (Counterexample(CASE, 0, 1, minimal=True, certificate="r.1.certificate.json"),))
    again = record.with_counterexample(Counterexample(CASE, 0, 1, minimal=False))
    assert (again.counterexamples[0].certificate, again.counterexamples[0].minimal) == ("r.1.certificate.json", False)
    other = record.with_counterexample(Counterexample(CASE, 2, 1, minimal=False))
    assert other.counterexamples[0].certificate is None
    words = record.with_counterexample(Counterexample(CASE, 0, 1, minimal=True, instead="two engines"))
    assert (words.counterexamples[0].certificate, words.counterexamples[0].instead) == (None, "two engines")


def test_coverage_goes_on():
    """More coverage of a space takes the place of less; as much leaves the record as it is, so that files do not change for nothing."""
    record = Record("r", "open", rule=HASH, coverage=(P2,))
    assert record.with_coverage([replace(P2, seconds=0.125)]) == record
    assert record.with_coverage([replace(P2, seen=5, rows=5, cases=6, nonzero=5)]) == record
    other = Covered(FlagVariety("Gr(1,2)"), 4, 4, 4, 4)
    assert record.with_coverage([other]).coverage == (other, P2)
    part = Record("r", "open", rule=HASH, coverage=(replace(P2, seen=5, rows=5, cases=6, nonzero=5),))
    assert part.with_coverage([P2]) == record
    with pytest.raises(
        RecordError, match=r"coverage of Gr\(1,3\), got two that contradict each other: cases 11 and 12 after 9 and 9 rows"
    ):
        record.with_coverage([replace(P2, cases=11)])


def test_coverage_belongs_to_a_rule():
    """Without the hash of a rule there is no coverage and no sample."""
    with pytest.raises(RecordError, match=r"use renewed\(hash\) first"):
        Record("r", "open").with_coverage([P2])
    with pytest.raises(RecordError, match=r"use renewed\(hash\) first"):
        Record("r", "open").with_sample(Sample(P2.X, "drawn", 1, 10, 10))


def test_stale():
    """Coverage and samples of another version of the rule are stale, said in words, and dropped; counterexamples stay."""
    found = Counterexample(CASE, 0, 1, minimal=True)
    other = Covered(FlagVariety("Gr(1,2)"), 4_000, 4, 4_000, 4)
    sample = Sample(P2.X, "drawn", 1, 10, 10)
    record = Record("r", "refuted", (found,), rule=HASH, coverage=(P2, other))
    assert not record.is_stale(HASH)
    assert record.renewed(HASH) is record
    assert stale_words(record, HASH) == ""
    assert record.is_stale(OTHER_HASH)
    assert record.renewed(OTHER_HASH) == Record("r", "refuted", (found,), rule=OTHER_HASH)
    ends = "computed for another version of the rule and"
    assert stale_words(record, OTHER_HASH) == f"coverage of 2 spaces, 4,009 rows, was {ends} counts no more"
    assert (
        stale_words(record.with_sample(sample), OTHER_HASH)
        == f"coverage of 2 spaces, 4,009 rows, and 1 sample, 10 rows, were {ends} count no more"
    )
    only = Record("r", "open", rule=HASH).with_sample(sample)
    assert stale_words(only, OTHER_HASH) == f"1 sample, 10 rows, was {ends} counts no more"
    bare = Record("r", "refuted", (found,), rule=HASH)
    assert not bare.is_stale(OTHER_HASH), "a counterexample is computed again anyway"
    assert stale_words(bare, OTHER_HASH) == ""


def test_the_record_as_it_stands(rule):
    """The current record has statement, ring and hash of the rule as it is now; a change of the file drops its coverage."""
    record = current_record(rule)
    assert record == Record("my_rule", "open", ring="quantum", premise=False, rule=rule_hash(rule.file), file="plugin.py")
    write_record(rule, record.with_coverage([P2]))
    assert current_record(rule).coverage == (P2,)
    with Path(rule.file).open("a", encoding="utf-8") as file:
        file.write("# changed\n")
    assert current_record(rule) == replace(record, rule=rule_hash(rule.file))
    assert read_record(rule).coverage == (P2,), "nothing is dropped from the file by reading"


@given(records(), records(), records())
def test_merging(first, second, third):
    """Merging is commutative, associative and idempotent, and loses no space and no counterexample."""
    both = merge(first, second)
    assert both == merge(second, first)
    assert merge(both, third) == merge(first, merge(second, third))
    assert merge(first, first) == first
    assert merge(both, first) == both
    assert {c.key for c in both.counterexamples} == {c.key for r in (first, second) for c in r.counterexamples}
    assert {s.key for s in both.samples} == {s.key for r in (first, second) for s in r.samples}
    reach = {c.X: c.seen for c in both.coverage}
    for record in (first, second):
        assert all(reach[c.X] >= c.seen for c in record.coverage)


OTHER_PLACE = Counterexample(SMALLER, 0, 1, minimal=False)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"conjecture": "other"}, "two records of one conjecture, got my_rule and other"),
        ({"rule": OTHER_HASH}, f"one hash of the rule in both records of my_rule, got {HASH} and {OTHER_HASH}"),
        ({"statement": "other"}, "one statement in both records of my_rule, got words and other"),
        ({"ring": "classical"}, "one ring in both records"),
        ({"premise": True}, "whether there is a premise in both records of my_rule, got False and True"),
        (
            {"coverage": (replace(P2, rows=8),)},
            "one coverage of Gr(1,3), got two that contradict each other: rows 8 and 9 after 9 and 9",
        ),
        ({"coverage": (replace(P2, nonzero=9),)}, "nonzero 9 and 10 after 9 and 9 rows"),
        ({"coverage": (replace(P2, failing=1),)}, "failing 0 and 1 after 9 and 9 rows"),
        ({"coverage": (replace(P2, seen=8, nonzero=11),)}, "nonzero 11 and 10 after 8 and 9 rows"),
        (
            {"samples": (Sample(P2.X, "drawn", 7, 10, 21),)},
            "sample of Gr(1,3) with seed 7, got two that contradict each other: cases 20 and 21",
        ),
        (
            {"counterexamples": (Counterexample(CASE, 0, 2, minimal=False),)},
            f"one value of the oracle at counterexample {CASE}, got 1 and 2",
        ),
        (
            {"counterexamples": (Counterexample(CASE, 3, 1, minimal=False),)},
            f"one value of the rule at counterexample {CASE}, got 0 and 3",
        ),
        (
            {"counterexamples": (OTHER_PLACE,)},
            f"no counterexample smaller than {CASE}, which is on record as minimal, got {SMALLER}",
        ),
        (
            {
                "counterexamples": (
                    Counterexample(Case.parse("Gr(1,3): (1) * (1) -> (2), q^(0)"), 0, 1, minimal=False, rule_hash=HASH),
                )
            },
            "expected agreement or a counterexample at Gr(1,3): (1) * (1) -> (2), q^(0), got both for one version of the rule my_rule: "
            "9 rows of Gr(1,3) are said to agree; ",
        ),
    ],
    ids=range(14),
)
def test_contradictions(changes, words):
    """Records of two rules, or with two answers to one question, are not merged, in either order; the message names the entry."""
    sample = Sample(P2.X, "drawn", 7, 10, 20)
    found = Counterexample(CASE, 0, 1, minimal="said to agree" not in words)
    one = Record("my_rule", "refuted", (found,), "words", "quantum", premise=False, rule=HASH, coverage=(P2,), samples=(sample,))
    messages = []
    for pair in ((one, replace(one, **changes)), (replace(one, **changes), one)):
        with pytest.raises(RecordError) as caught:
            merge(*pair)
        messages.append(str(caught.value))
    assert any(words in message for message in messages), messages


@given(records())
def test_read_back(record):
    """What is written is read back as it was, and the text of what is read is the text."""
    assert read_text(record_text(record)) == record


@given(records(), st.randoms(use_true_random=False))
def test_merged_by_hand(record, random):
    """Entries in any order, and entries that stand twice after a merge by hand, make the same record."""
    data = json.loads(record_text(record))
    for key in ("coverage", "samples", "counterexamples"):
        data[key] = data[key] + random.sample(data[key], k=len(data[key]) // 2)
        random.shuffle(data[key])
    assert read_text(json.dumps(data)) == record


def read_text(text):
    """The record in a text, through a file."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "record.json"
        path.write_text(text, encoding="utf-8")
        return read_record_file(path)


def test_nothing_is_written_over_what_is_not_understood(rule):
    """A damaged file, a newer one, or the record of another conjecture is not overwritten."""
    path = record_path(rule)
    path.parent.mkdir()
    other = record_text(Record("other", "open"))
    for text in ("", "<<<<<<< ours\n", TEXT % HASH.replace("0", "x"), TEXT.replace('"version": 1', '"version": 2') % HASH, other):
        path.write_text(text, encoding="utf-8")
        with pytest.raises(RecordError, match=r"nothing was written|write over"):
            write_record(rule, Record("my_rule", "open"))
        assert path.read_text(encoding="utf-8") == text
    assert list(path.parent.iterdir()) == [path]


def test_nothing_unreadable_is_written(rule):
    """A record that would not be read back is not written, and leaves no draft behind."""
    write_record(rule, Record("my_rule", "open"))
    for bad in (
        Record("my_rule", "refuted"),
        Record("my_rule", "open", rule="sha256:1"),
        Record("my_rule", "open", (Counterexample(CASE, -1, 1, minimal=True),)),
        Record("my_rule", "open", rule=HASH, coverage=(replace(P2, seen=10),)),
        Record("my_rule", "open", rule=HASH, coverage=(replace(P2, seconds=float("nan")),)),
    ):
        with pytest.raises(RecordError):
            write_record(rule, bad)
        assert read_record(rule) == Record("my_rule", "open")
    assert list(record_path(rule).parent.iterdir()) == [record_path(rule)]


def test_written_in_one_step(rule, tmp_path, monkeypatch):
    """The file keeps its mode, a link stays a link, and if writing fails the old text is still there and no draft is left."""
    path = write_record(rule, Record("my_rule", "open"))
    path.chmod(0o640)
    link = tmp_path / "link.json"
    link.symlink_to(path)
    write_record_file(link, Record("my_rule", "open", rule=HASH))
    assert link.is_symlink()
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert read_record(rule).rule == HASH

    def no_room(*_):
        raise OSError("no room")

    monkeypatch.setattr(os, "replace", no_room)
    monkeypatch.setattr("pathlib.Path.replace", no_room)
    with pytest.raises(RecordError, match="expected a file that can be written, got no room; nothing was recorded"):
        write_record(rule, Record("my_rule", "open"))
    assert read_record(rule).rule == HASH
    assert list(path.parent.iterdir()) == [path]


def test_one_record_for_one_file(rule):
    """A record names its plug-in file; for a conjecture of that name in another file it is neither read nor written over."""
    written = write_record(rule, current_record(rule)).read_text(encoding="utf-8")
    other = Path(rule.file).with_name("other.py")
    other.write_text(Path(rule.file).read_text(encoding="utf-8"), encoding="utf-8")
    (twin,) = conjectures_in_file(other)
    words = "expected the record of my_rule in other.py, got that of my_rule in plugin.py; .* rename one of the two functions"
    with pytest.raises(RecordError, match=words):
        read_record(twin)
    with pytest.raises(RecordError, match=words):
        write_record(twin, Record("my_rule", "open", file="other.py"))
    assert record_path(rule).read_text(encoding="utf-8") == written
    with pytest.raises(RecordError, match=r"expected one plug-in file in both records of my_rule, got a\.py and b\.py"):
        merge(Record("my_rule", "open", file="a.py"), Record("my_rule", "open", file="b.py"))
    write_record_file(record_path(rule), Record("my_rule", "open"))
    assert read_record(twin).file is None, "an old record names no file, and goes with any"


def test_what_refutes_which_version():
    """A counterexample refutes the version of the rule that it names; one that names none, none that is named."""
    mine, its, nobodys = (Counterexample(CASE, 0, 1, minimal=False, rule_hash=version) for version in (HASH, OTHER_HASH, None))
    for known, expected in ((mine, True), (its, False), (nobodys, False)):
        record = Record("my_rule", "refuted", (known,), rule=HASH)
        assert bool(record.refuting()) == bool(record.refuting(HASH)) == expected
        assert bool(record.refuting(OTHER_HASH)) == (known is its)
    assert Record("my_rule", "refuted", (nobodys,)).refuting(HASH), "a record from before versions were named is believed"
    with pytest.raises(RecordError, match="expected one version of the rule at counterexample"):
        merge(Record("my_rule", "refuted", (mine,)), Record("my_rule", "refuted", (its,)))


def test_a_folder_that_takes_nothing(rule):
    """Where nothing can be written, that is an error of the record, and names the file."""
    record_path(rule).parent.write_text("a file", encoding="utf-8")
    with pytest.raises(RecordError, match=r"my_rule\.json: expected a file that can be written"):
        write_record(rule, Record("my_rule", "open"))
