"""The bundled records speak about the bundled rules as they are, and their certificates prove what they say."""

import json
from pathlib import Path

import pytest

from conjcheck import Case, recheck
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.evidence.record import current_record, read_record, read_record_file, record_path, stale_words
from conjcheck.evidence.source import rule_hash

FOLDER = Path(__file__).parents[2] / "conjectures"
RECORDS = [path for path in sorted((FOLDER / "records").glob("*.json")) if not path.name.endswith(".certificate.json")]
CERTIFICATES = sorted((FOLDER / "records").glob("*.certificate.json"))
RULES = {
    conjecture.name: conjecture
    for path in sorted(FOLDER.glob("*.py"))
    if not path.name.startswith("_")
    for conjecture in conjectures_in_file(path)
}


@pytest.mark.parametrize("path", RECORDS, ids=lambda path: path.stem)
def test_not_stale(path):
    """What is on record was computed for the rule as it stands; else: pytest conjectures/FILE -k survey --conjcheck-record."""
    rule = RULES[path.stem]
    assert record_path(rule).resolve() == path.resolve()
    record = read_record(rule)
    assert stale_words(record, rule_hash(rule.file)) == ""
    assert current_record(rule) == record, "statement, ring and premise are those of the rule"
    assert record.coverage


@pytest.mark.parametrize("path", CERTIFICATES, ids=lambda path: path.stem)
def test_certificates(path):
    """Every certificate is accepted by the checker, belongs to a counterexample on record, and certifies the value that stands there."""
    data = json.loads(path.read_text(encoding="utf-8"))
    recheck.check(data)
    record = read_record_file(FOLDER / "records" / f"{data['rule']['name']}.json")
    (found,) = [c for c in record.counterexamples if c.certificate == path.name]
    assert isinstance(found.where, Case)
    assert data["claim"]["text"] == str(found.where)
    assert (data["rule"]["value"], data["claim"]["value"]) == (found.rule, found.oracle)
    assert data["rule"]["hash"] == record.rule


def test_every_certificate_on_record_is_there():
    """A record names no certificate that is not beside it; a counterexample without one says what stands in its place."""
    named = [c for path in RECORDS for c in read_record_file(path).counterexamples]
    assert {c.certificate for c in named if c.certificate} == {path.name for path in CERTIFICATES}
    assert all(c.certificate or c.instead for c in named)
