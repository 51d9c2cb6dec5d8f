"""Records: sorted, readable, and believed in nothing."""

import importlib.util
import json

import pytest

from conjcheck import Case, Row
from conjcheck.errors import NotationError, RecordError
from conjcheck.evidence.record import Counterexample, Record, parse_place, read_record, record_path, write_record

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
        "my_rule", "refuted", (Counterexample(CASE, 0, 1, minimal=True), Counterexample(ROW, None, None, minimal=False))
    )
    assert write_record(rule, record) == record_path(rule)
    assert read_record(rule) == record
    write_record(rule, Record("my_rule", "open", ()))
    assert read_record(rule) == Record("my_rule", "open", ())


def test_the_text(rule):
    """The file is indented JSON with one line per fact, ending in a newline, the same for the same record."""
    record = Record("my_rule", "refuted", (Counterexample(CASE, 0, 1, minimal=True),))
    text = write_record(rule, record).read_text(encoding="utf-8")
    assert text == (
        '{\n  "format": "conjcheck-record",\n  "version": 1,\n  "conjecture": "my_rule",\n  "status": "refuted",\n'
        '  "counterexamples": [\n    {\n      "where": "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)",\n'
        '      "rule": 0,\n      "oracle": 1,\n      "minimal": true\n    }\n  ]\n}\n'
    )
    assert write_record(rule, record).read_text(encoding="utf-8") == text


def test_one_more_counterexample():
    """A new counterexample refutes, is put in order, and replaces one at the same place."""
    record = Record("r", "open", ()).with_counterexample(Counterexample(CASE, 0, 1, minimal=False))
    record = record.with_counterexample(Counterexample(SMALLER, 0, 1, minimal=True))
    assert record.status == "refuted"
    assert [c.where for c in record.counterexamples] == [SMALLER, CASE]
    again = record.with_counterexample(Counterexample(CASE, 5, 1, minimal=False))
    assert [(c.where, c.rule) for c in again.counterexamples] == [(SMALLER, 0), (CASE, 5)]
    with_row = again.with_counterexample(Counterexample(CASE.row, None, None, minimal=False))
    assert [c.where for c in with_row.counterexamples] == [SMALLER, CASE.row, CASE]


def test_places():
    """With an arrow it is a case, without one a row; anything else is refused."""
    assert parse_place(str(CASE)) == CASE
    assert parse_place(str(ROW)) == ROW
    for text in ("", "Gr(2,4)", "Gr(2,4): (1) -> (1)", "Gr(2,4): (9) * (1)"):
        with pytest.raises(NotationError):
            parse_place(text)


GOOD = {
    "format": "conjcheck-record",
    "version": 1,
    "conjecture": "my_rule",
    "status": "refuted",
    "counterexamples": [{"where": str(CASE), "rule": 0, "oracle": 1, "minimal": True}],
}


def entry(**changes):
    """The record with a changed counterexample after a good one."""
    return GOOD | {"counterexamples": [*GOOD["counterexamples"], GOOD["counterexamples"][0] | changes]}


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", "expected JSON in UTF-8"),
        (b"{", "expected JSON in UTF-8"),
        (b"\xff\xfe", "expected JSON in UTF-8"),
        (b"[" * 100_000, "expected JSON in UTF-8"),
        (b"<<<<<<< ours\n{}\n=======\n", "restore the file or delete it"),
        ([], "this is not a record"),
        ({}, "this is not a record"),
        (None, "this is not a record"),
        (GOOD | {"format": "other"}, "this is not a record"),
        (GOOD | {"version": 2}, "expected version 1, got 2; use the conjcheck that wrote it"),
        (GOOD | {"version": "1"}, "expected version 1, got '1'"),
        (GOOD | {"conjecture": "other"}, "expected the record of 'my_rule', got that of 'other'"),
        (GOOD | {"status": "agrees"}, 'expected "status" to be "open" or "refuted", got \'agrees\''),
        (GOOD | {"status": ["open"]}, 'expected "status" to be "open" or "refuted"'),
        (GOOD | {"counterexamples": {}}, 'expected a list under "counterexamples", got {}'),
        (GOOD | {"counterexamples": []}, "expected a counterexample, since the status is refuted, got none"),
        (GOOD | {"counterexamples": ["text"]}, "expected an object with a text under \"where\" as counterexample 1, got 'text'"),
        (entry(where=5), 'under "where" as counterexample 2'),
        (entry(where="Gr(2,4): (9) * (1)"), "counterexample 2: "),
        (entry(where="nonsense"), "counterexample 2: expected a row"),
        (entry(where="P^999999999: (1) * (1)"), "counterexample 2: "),
        (entry(rule=-1), 'an integer of 0 or more, or a polynomial as text under "rule" of counterexample 2, got -1'),
        (entry(rule=1.0), 'under "rule" of counterexample 2, got 1.0'),
        (entry(oracle=True), 'under "oracle" of counterexample 2, got True'),
        (entry(oracle=[1]), 'under "oracle" of counterexample 2'),
    ],
    ids=range(25),
)
def test_damaged_records(rule, content, words):
    """A file that is no record of this conjecture is refused with its path, the entry, what was expected and what came."""
    path = record_path(rule)
    path.parent.mkdir()
    path.write_bytes(content if isinstance(content, bytes) else json.dumps(content).encode())
    with pytest.raises(RecordError) as caught:
        read_record(rule)
    assert str(caught.value).startswith(f"{path}: ")
    assert words in str(caught.value)


def test_a_folder_in_its_place(rule):
    """A folder, or a link that leads nowhere, is not taken for a record, and not for none either."""
    record_path(rule).mkdir(parents=True)
    with pytest.raises(RecordError):
        read_record(rule)


def test_minimal_is_never_invented(rule):
    """Only the word true makes a recorded counterexample minimal."""
    path = record_path(rule)
    path.parent.mkdir()
    for value, expected in ((True, True), (False, False), ("yes", False), (1, False), (None, False)):
        path.write_text(json.dumps(GOOD | {"counterexamples": [{"where": str(CASE), "rule": 0, "oracle": 1, "minimal": value}]}))
        assert read_record(rule).counterexamples[0].minimal is expected
