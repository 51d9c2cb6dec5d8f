"""From a refutation to an entry of a record, with its certificate."""

import importlib.util
import json

import pytest

from conjcheck import Case, Row
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import RecordError
from conjcheck.evidence.record import Counterexample, Covered, Record, write_record
from conjcheck.evidence.source import rule_hash
from conjcheck.testing.compare import Comparer
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.recording import asked_again, certificate_path, counterexample, recording, write_recording

SOURCE = """
from conjcheck import *


@candidate(on=Varieties("Gr(1,3)", "Gr(1,4)"))
def wrong(X, u, v, w, d):
    return X.n == 3 and u.length + v.length == w.length + d[0] * X.n


@claim(on=Varieties("Gr(1,3)"))
def never(X, u, v, N):
    return len(N.product(u, v)) != 1
"""


@pytest.fixture
def module(tmp_path):
    """Two conjectures in a file of their own, both wrong."""
    path = tmp_path / "plugin.py"
    path.write_text(SOURCE, encoding="utf-8")
    spec = importlib.util.spec_from_file_location("plugin", path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_with_a_certificate(module, tmp_path):
    """The certificate is a file beside the record, named after the conjecture and the case; it holds case, values and rule."""
    outcome = Examination(module.wrong, EFFORTS["quick"]).survey()
    found = counterexample(outcome.finding, module.wrong, minimal=True, confirmed_by=outcome.confirmed_by)
    assert (found.where, found.rule, found.oracle, found.minimal) == (outcome.finding.where, 0, 1, True)
    assert found.instead is None
    path = tmp_path / "records" / found.certificate
    assert path == certificate_path(module.wrong, outcome.finding)
    assert path.name.startswith("wrong.")
    data = json.loads(path.read_text(encoding="utf-8"))
    assert data["claim"]["text"] == str(found.where)
    assert data["claim"]["value"] == found.oracle
    assert found.rule_hash == rule_hash(module.wrong.file)
    assert data["rule"] == {"name": "wrong", "hash": rule_hash(module.wrong.file), "value": 0}


def test_without_one(module, tmp_path):
    """A row has no certificate: the witnesses stand in its place, and no file is written."""
    outcome = Examination(module.never, EFFORTS["quick"]).survey()
    found = counterexample(outcome.finding, module.never, minimal=True, confirmed_by=outcome.confirmed_by)
    assert found.certificate is None
    assert found.instead == f"no certificate; confirmed: {outcome.confirmed_by}"
    assert list((tmp_path / "records").iterdir()) == []
    silent = counterexample(outcome.finding, module.never, minimal=True, confirmed_by="")
    assert "has no certificate" in silent.instead


def test_a_record_from_before_versions_were_named(module):
    """A counterexample that names no version is computed again; one at a place that is none of the family's any more is retired."""
    places = ("Gr(1,4): (1) * (1) -> (2), q^(0)", "Gr(1,5): (1) * (1) -> (2), q^(0)", "Gr(1,3): (1) * (1) -> (2), q^(0)")
    known = tuple(Counterexample(Case.parse(place), None, None, minimal=False, instead="words") for place in places)
    write_record(module.wrong, Record("wrong", "refuted", known))
    asked = []

    def again(where):
        asked.append(str(where))
        return asked_again(Comparer(module.wrong), where)

    made = recording(module.wrong, again)
    assert sorted(asked) == sorted(places)
    (left,) = made.record.counterexamples
    assert (str(left.where), left.rule, left.oracle, left.rule_hash) == (places[0], 0, 1, rule_hash(module.wrong.file))
    assert made.note == f"2 counterexamples on record refute no more and were retired: {places[2]}; {places[1]}"
    write_recording(module.wrong, made)
    assert recording(module.wrong, again).note == ""
    assert len(asked) == 3, "what refutes this version is not asked again"


def test_a_claim_about_rows(module):
    """A row is asked again as a row."""
    where = Row.parse("Gr(1,3): () * ()")
    assert asked_again(Comparer(module.never), where).where == where
    assert asked_again(Comparer(module.never), Row.parse("Gr(1,4): () * ()")) is None


def test_a_folder_that_takes_nothing(module, tmp_path):
    """Where no certificate can be written, that is an error of the record."""
    (tmp_path / "records").write_text("a file")
    outcome = Examination(module.wrong, EFFORTS["quick"]).survey()
    with pytest.raises(RecordError, match="expected a file that can be written"):
        counterexample(outcome.finding, module.wrong, minimal=True, confirmed_by="")


def test_agreement_with_itself_is_not_recorded(tmp_path):
    """A rule whose file asked the oracle while it was imported gets no coverage on record; a counterexample stays one."""
    path = tmp_path / "plugin.py"
    path.write_text(
        SOURCE + "from conjcheck import Gr, product\nTABLE = product(Gr(1, 2).point, Gr(1, 2).point)\n", encoding="utf-8"
    )
    wrong, never = conjectures_in_file(path)
    with pytest.raises(
        RecordError, match=r"plugin.py or a helper of it asked the oracle while it was imported; nothing was recorded"
    ):
        recording(wrong, lambda where: None)
    found = Counterexample(Case.parse("Gr(1,3): (1) * (1) -> (2), q^(0)"), 0, 1, minimal=False, rule_hash=rule_hash(path))
    assert recording(wrong, lambda where: None, found=found).record.status == "refuted"
    assert recording(never, lambda where: None).record.status == "open"


def test_agreement_where_it_fails(module):
    """A counterexample among what is on record as agreeing, for the same version, is a contradiction, not one more entry."""
    where = Case.parse("Gr(1,3): (1) * (1) -> (2), q^(0)")
    found = Counterexample(where, 0, 1, minimal=False, rule_hash=rule_hash(module.wrong.file))
    for seen, fits in ((4, True), (5, False), (9, False)):
        coverage = [Covered(where.X, seen, seen, seen, seen)]
        if fits:
            assert recording(module.wrong, lambda where: None, coverage=coverage, found=found).record.status == "refuted"
            continue
        with pytest.raises(
            RecordError, match=f"got both for one version of the rule wrong: {seen} rows of Gr.1,3. are said to agree"
        ):
            recording(module.wrong, lambda where: None, coverage=coverage, found=found)
