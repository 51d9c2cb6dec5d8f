"""From a refutation to an entry of a record, with its certificate."""

import importlib.util
import json

import pytest

from conjcheck.evidence.source import rule_hash
from conjcheck.testing.examine import EFFORTS, Examination
from conjcheck.testing.recording import certificate_path, counterexample

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
