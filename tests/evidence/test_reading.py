"""Reading records: what is no record is refused by name, and the schema says the same as the reader."""

import json
from copy import deepcopy
from pathlib import Path

import jsonschema
import pytest
from hypothesis import given
from hypothesis import strategies as st
from making import HASH, records

import conjcheck
from conjcheck import Case, Row
from conjcheck.errors import NotationError, RecordError
from conjcheck.evidence.reading import contents, parse_place
from conjcheck.evidence.record import Record, read_record_file, record_text

CASE = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")
ROW = Row.parse("Fl(3): [132] * [321]")
SCHEMA = json.loads((Path(conjcheck.__file__).parent / "evidence" / "record.schema.json").read_text(encoding="utf-8"))
VALIDATOR = jsonschema.Draft202012Validator(SCHEMA)
BUNDLED = sorted((Path(__file__).parents[2] / "conjectures" / "records").glob("*.json"))
BUNDLED = [path for path in BUNDLED if not path.name.endswith(".certificate.json")]


COVERED = {
    "space": "Gr(1,3)",
    "rows": 8,
    "seen": 9,
    "of": 9,
    "cases": 12,
    "nonzero": 10,
    "failing": 0,
    "seconds": 0.5,
    "engine": "recursion",
    "conjcheck": "0.1.0",
}
SAMPLE = {
    "space": "Fl(5)",
    "how": "drawn",
    "seed": 3,
    "rows": 100,
    "cases": 500,
    "failing": 3,
    "bound": "at 95 % the share of failing rows inside the premise, weighted as drawn, is at most 0.0758",
    "conjcheck": "0.1.0",
}
FOUND = {"where": str(CASE), "rule": 0, "oracle": 1, "minimal": True}
GOOD = {
    "format": "conjcheck-record",
    "version": 1,
    "conjecture": "my_rule",
    "status": "refuted",
    "statement": "",
    "ring": "quantum",
    "premise": None,
    "rule": HASH,
    "coverage": [COVERED],
    "samples": [SAMPLE],
    "counterexamples": [FOUND],
}


def entry(key="counterexamples", **changes):
    """The record with a changed entry after a good one."""
    return GOOD | {key: [*GOOD[key], GOOD[key][0] | changes]}


def without(data, key):
    """The object without one key."""
    return {name: value for name, value in data.items() if name != key}


DAMAGED = [
    (b"", "expected JSON in UTF-8"),
    (b"{", "expected JSON in UTF-8"),
    (b"\xff\xfe", "expected JSON in UTF-8"),
    (b"[" * 100_000, "expected JSON in UTF-8"),
    (b"<<<<<<< ours\n{}\n=======\n", "restore the file, or move it away"),
    (json.dumps(GOOD).replace("0.5", "NaN").encode(), "expected JSON in UTF-8, got NaN, which is no number"),
    (json.dumps(GOOD)[:-1].encode() + b', "status": "open"}', "expected every key once in an object, got 'status' twice"),
    (entry("coverage", cases=13), "expected one coverage of Gr(1,3), got two that contradict each other: cases 12 and 13"),
    (entry(oracle=2), f"expected one value of the oracle at counterexample {CASE}, got 1 and 2"),
]
"""Files, and records that contradict themselves: what a schema cannot say."""

WRONG = [
    ([], "this is not a record"),
    ({}, "this is not a record"),
    (None, "this is not a record"),
    (GOOD | {"format": "other"}, "this is not a record"),
    (GOOD | {"version": 2}, "expected version 1, got 2; use the conjcheck that wrote it"),
    (GOOD | {"version": "1"}, "expected version 1, got '1'"),
    (GOOD | {"version": None}, "expected version 1, got None"),
    (GOOD | {"conjecture": ""}, "expected the name of a conjecture"),
    (GOOD | {"conjecture": 5}, "expected the name of a conjecture"),
    (GOOD | {"file": "folder/rule.py"}, "expected null or the name of the plug-in file under \"file\", got 'folder/rule.py'"),
    (entry(rule_hash="sha256:12"), "under \"rule_hash\" of counterexample 2, got 'sha256:12'"),
    (
        {"format": "conjcheck-certificate"},
        "this is a certificate, not a record, which is a file such as conjectures/records/NAME.json",
    ),
    (without(GOOD, "conjecture"), "expected the name of a conjecture"),
    (GOOD | {"status": "agrees"}, 'expected "status" to be "open" or "refuted", got \'agrees\''),
    (GOOD | {"status": ["open"]}, 'expected "status" to be "open" or "refuted"'),
    (without(GOOD, "status"), 'expected "status" to be "open" or "refuted"'),
    (GOOD | {"statement": None}, 'a text under "statement", got None'),
    (GOOD | {"ring": "other"}, "under \"ring\", got 'other'"),
    (GOOD | {"ring": None}, 'under "ring", got None'),
    (GOOD | {"premise": "yes"}, "under \"premise\", got 'yes'"),
    (GOOD | {"rule": "sha256:12"}, "64 hexadecimal digits, under \"rule\", got 'sha256:12'"),
    (GOOD | {"rule": 5}, 'under "rule", got 5'),
    (GOOD | {"statment": ""}, "in the record, got 'statment'"),
    (GOOD | {"counterexamples": {}}, 'expected a list under "counterexamples", got {}'),
    (without(GOOD, "counterexamples"), 'expected a list under "counterexamples", got None'),
    (GOOD | {"counterexamples": []}, "expected a counterexample, since the status is refuted, got none"),
    (GOOD | {"counterexamples": ["text"]}, "expected an object with a text under \"where\" as counterexample 1, got 'text'"),
    (entry(where=5), 'under "where" as counterexample 2'),
    (entry(rule=-1), 'an integer of 0 or more, or a polynomial as text under "rule" of counterexample 2, got -1'),
    (entry(rule=1.5), 'under "rule" of counterexample 2, got 1.5'),
    (entry(oracle=True), 'under "oracle" of counterexample 2, got True'),
    (entry(oracle=[1]), 'under "oracle" of counterexample 2'),
    (entry(minimal="yes"), "expected true or false under \"minimal\" of counterexample 2, got 'yes'"),
    (entry(minimal=1), 'under "minimal" of counterexample 2, got 1'),
    (entry(minimal=None), 'under "minimal" of counterexample 2, got None'),
    (entry(minimale=True), "in counterexample 2, got 'minimale'"),
    (entry(certificate="../a.json"), "a file beside the record under \"certificate\" of counterexample 2, got '../a.json'"),
    (entry(certificate=".."), 'under "certificate" of counterexample 2'),
    (entry(certificate=""), 'under "certificate" of counterexample 2'),
    (entry(instead=""), "expected null or a text under \"instead\" of counterexample 2, got ''"),
    (entry(certificate="a.json", instead="words"), 'expected either "certificate" or "instead" in counterexample 2, got both'),
    (GOOD | {"coverage": {}}, 'expected a list under "coverage"'),
    (GOOD | {"coverage": [5]}, 'an object with the name of a space under "space" as entry 1 of the coverage, got 5'),
    (entry("coverage", space=None), 'under "space" as entry 2 of the coverage'),
    (entry("coverage", sapce=""), "in entry 2 of the coverage, got 'sapce'"),
    (entry("coverage", rows=-1), 'an integer of 0 or more under "rows" of entry 2 of the coverage, got -1'),
    (entry("coverage", seen=1.5), 'under "seen" of entry 2 of the coverage, got 1.5'),
    (entry("coverage", cases="12"), 'under "cases" of entry 2 of the coverage'),
    (entry("coverage", failing=None), 'under "failing" of entry 2 of the coverage'),
    (entry("coverage", seconds=-0.5), 'under "seconds" of entry 2 of the coverage, got -0.5'),
    (entry("coverage", seconds=True), 'under "seconds" of entry 2 of the coverage, got True'),
    (entry("coverage", engine=""), "a text under \"engine\" of entry 2 of the coverage, got ''"),
    (entry("coverage", conjcheck=1), 'under "conjcheck" of entry 2 of the coverage'),
    *((GOOD | {"coverage": [without(COVERED, key)]}, f'under "{key}" ') for key in COVERED),
    (GOOD | {"samples": [None]}, "as sample 1, got None"),
    (entry("samples", seed="3"), "an integer under \"seed\" of sample 2, got '3'"),
    (entry("samples", how=""), 'a text under "how" of sample 2'),
    (entry("samples", extra=1), "in sample 2, got 'extra'"),
    *((GOOD | {"samples": [without(SAMPLE, key)]}, f'under "{key}" ') for key in SAMPLE),
]
"""What both the reader and the schema refuse."""

SUBTLE = [
    (GOOD | {"conjecture": "my rule"}, "expected the name of a conjecture"),
    (without(GOOD, "rule"), 'expected the hash of the rule under "rule", since there is coverage or a sample, got none'),
    (entry(where="Gr(2,4): (9) * (1)"), "counterexample 2: "),
    (entry(where="nonsense"), "counterexample 2: expected a row"),
    (entry(where="P^999999999: (1) * (1)"), "counterexample 2: "),
    (entry("coverage", space="Gr(3,3)"), "entry 2 of the coverage: "),
    (entry("coverage", of=10), 'expected 9, the number of rows of Gr(1,3), under "of" of entry 2 of the coverage, got 10'),
    (entry("coverage", seen=10), 'expected at most 9, the "of", under "seen" of entry 2 of the coverage, got 10'),
    (entry("coverage", seen=7), 'at most 7, the "seen", under "rows" of entry 2 of the coverage, got 8'),
    (entry("coverage", cases=7), 'at most 7, the "cases", under "rows" of entry 2'),
    (entry("coverage", nonzero=13), 'at most 12, the "cases", under "nonzero" of entry 2'),
    (entry("coverage", failing=13), 'at most 12, the "cases", under "failing" of entry 2'),
    (entry("coverage", rows=0), 'expected no "cases" without "rows" in entry 2 of the coverage, got 12'),
    (entry("samples", failing=101), 'at most 100, the "rows", under "failing" of sample 2, got 101'),
    (entry("samples", rows=501), 'under "rows" of sample 2, got 501'),
    (entry("samples", space="Fl(1)"), "sample 2: "),
    (
        entry("samples", bound="at most 0.01"),
        'is at most 0.0758\' under "bound" of sample 2, which follows from "rows" and "failing"',
    ),
]
"""What only the reader refuses: the schema says so in its description."""


@pytest.mark.parametrize(("content", "words"), [*DAMAGED, *WRONG, *SUBTLE])
def test_damaged_records(tmp_path, content, words):
    """A file that is no record is refused with its path, the entry, what was expected and what came."""
    path = tmp_path / "my_rule.json"
    path.write_bytes(content if isinstance(content, bytes) else json.dumps(content).encode())
    with pytest.raises(RecordError) as caught:
        read_record_file(path)
    assert str(caught.value).startswith(f"{path}: ")
    assert words in str(caught.value)


def test_the_schema_is_one():
    """The schema is valid, and so is what the other tests start from."""
    jsonschema.Draft202012Validator.check_schema(SCHEMA)
    VALIDATOR.validate(GOOD)
    assert contents(GOOD)["samples"][0].bound == SAMPLE["bound"]


@pytest.mark.parametrize("content", [content for content, _ in WRONG])
def test_the_schema_refuses(content):
    """What the reader refuses for its shape, the schema refuses, too."""
    assert not VALIDATOR.is_valid(content)


@pytest.mark.parametrize("content", [content for content, _ in SUBTLE])
def test_the_schema_knows_no_mathematics(content):
    """What only the reader can know passes the schema."""
    assert VALIDATOR.is_valid(content)


@pytest.mark.parametrize("path", BUNDLED, ids=lambda path: path.stem)
def test_the_bundled_records(path):
    """The bundled records satisfy the schema, and their files are what would be written."""
    text = path.read_text(encoding="utf-8")
    VALIDATOR.validate(json.loads(text))
    assert record_text(read_record_file(path)) == text


@given(records())
def test_what_is_written_satisfies_the_schema(record):
    """Every text that is written and read back satisfies the schema."""
    VALIDATOR.validate(json.loads(record_text(record)))


def test_small_old_records():
    """A record with nothing but status and counterexamples is read; what it does not say is empty."""
    small = {"format": "conjcheck-record", "version": 1, "conjecture": "r", "status": "refuted", "counterexamples": [FOUND]}
    VALIDATOR.validate(small)
    assert Record(**contents(small)) == Record("r", "refuted", Record(**contents(GOOD)).counterexamples)
    bare = small | {"counterexamples": [{"where": str(CASE)}]}
    VALIDATOR.validate(bare)
    (found,) = contents(bare)["counterexamples"]
    assert (found.rule, found.oracle, found.minimal, found.certificate, found.instead) == (None, None, False, None, None)


MISFITS = st.none() | st.booleans() | st.integers(-2, 2) | st.just(0.5) | st.text(max_size=2) | st.just([]) | st.just({})


@given(records(), st.data())
def test_schema_and_reader_agree_on_mutants(record, data):
    """After any one change of one value, what the reader accepts the schema accepts; what the schema refuses the reader refuses."""
    mutant = json.loads(record_text(record))
    target = mutant
    while True:
        place = data.draw(st.sampled_from(sorted(target) if isinstance(target, dict) else range(len(target))))
        inner = target[place]
        if not isinstance(inner, (dict, list)) or not inner or data.draw(st.integers(0, 4)) == 0:
            break
        target = inner
    if data.draw(st.booleans()) and isinstance(target, dict):
        del target[place]
    else:
        target[place] = deepcopy(data.draw(MISFITS))
    try:
        Record(**contents(mutant))
    except RecordError:
        return
    assert VALIDATOR.is_valid(mutant)


def test_places():
    """With an arrow it is a case, without one a row; anything else is refused."""
    assert parse_place(str(CASE)) == CASE
    assert parse_place(str(ROW)) == ROW
    for text in ("", "Gr(2,4)", "Gr(2,4): (1) -> (1)", "Gr(2,4): (9) * (1)"):
        with pytest.raises(NotationError):
            parse_place(text)
