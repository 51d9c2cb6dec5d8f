"""``conjcheck recheck``: the stand-alone checker behind a command."""

import json
import subprocess
import sys

import pytest
from click.testing import CliRunner

from conjcheck import Case, recheck
from conjcheck.cli import main
from conjcheck.evidence.certificate import write_certificate
from conjcheck.evidence.source import rule_hash

RULE = "from conjcheck import Grassmannians, candidate\n@candidate(on=Grassmannians())\ndef five(X, u, v, w, d):\n    return 5\n"
TEXT = "Gr(2,4): (1) * (1) -> (2), q^(0)"


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """A folder with a rule, its certificate, and a file that is none."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "rules.py").write_text(RULE, encoding="utf-8")
    about = {"conjecture_name": "five", "rule_hash": rule_hash(tmp_path / "rules.py")}
    write_certificate(tmp_path / "good.json", Case.parse(TEXT), rule_value=5, **about)
    data = json.loads((tmp_path / "good.json").read_text(encoding="utf-8"))
    data["claim"]["value"] = 5
    (tmp_path / "bad.json").write_text(json.dumps(data | {"digest": recheck.digest(data)}), encoding="utf-8")
    return tmp_path


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["recheck", *words], catch_exceptions=False, prog_name="conjcheck")


def test_accepted(folder):
    """An accepted certificate: one line, status 0, nothing on standard error."""
    done = run("good.json")
    assert (done.exit_code, done.stderr) == (0, "")
    assert done.stdout == f"accepted: N = 1 at {TEXT} (1 step on A3/B; five: the rule is said to give 5)\n"


def test_rejected(folder):
    """One rejected among several: each gets its line, in order, and the status is 1."""
    done = run("bad.json", "good.json")
    assert done.exit_code == 1
    assert done.stdout.splitlines()[0] == "rejected: the steps give N = 1, got value 5 in the claim"
    assert done.stdout.splitlines()[1].startswith("accepted: ")


def test_no_such_file(folder):
    """A file that is not there: status 2 and a line on standard error; no file at all is wrong usage."""
    done = run("missing.json", "bad.json")
    assert done.exit_code == 2
    assert done.stderr.startswith("unusable: expected a file, got 'missing.json'")
    assert run().exit_code == 2


def test_the_rule_again(folder):
    """With --rule the rule is asked again; another value gives status 1, no such rule status 2."""
    done = run("good.json", "--rule", "rules.py::five")
    assert done.exit_code == 0
    assert done.stdout.splitlines()[1] == "rule: five still gives 5 there; its file is unchanged"
    (folder / "rules.py").write_text(RULE.replace("return 5", "return 1"), encoding="utf-8")
    done = run("good.json", "--rule", "rules.py::five")
    assert done.exit_code == 1
    assert done.stdout.splitlines()[1] == "rule: five now gives 1 there, not 5; its file has changed since"
    assert run("good.json", "--rule", "rules.py::six").exit_code == 2


def test_the_command_and_the_file_say_the_same(folder):
    """The installed command and the stand-alone file print the same and end with the same status."""
    done = subprocess.run([sys.executable, recheck.__file__, "good.json", "bad.json"], capture_output=True, text=True, check=False)
    here = run("good.json", "bad.json")
    assert (done.stdout, done.returncode) == (here.stdout, here.exit_code)


def test_a_record(tmp_path):
    """A record is no certificate: the status is 2, and its certificates are named."""
    path = tmp_path / "rule.json"
    found = {"where": "x", "certificate": "rule.12345678.certificate.json"}
    path.write_text(json.dumps({"format": "conjcheck-record", "seconds": 0.5, "counterexamples": [found]}, indent=2))
    done = run(str(path))
    assert (done.exit_code, done.stdout) == (2, "")
    assert "rule.json': a record, no certificate; its certificates are, beside it, rule.12345678.certificate.json" in done.stderr


def test_json(folder):
    """One document with one entry per certificate, in order, and the exit status that each alone would have; nothing else is printed."""
    done = run("good.json", "bad.json", "missing.json", "--json", "--rule", "rules.py::five")
    assert (done.exit_code, done.stderr) == (2, "")
    good, bad, missing = json.loads(done.stdout)
    assert good == {
        "certificate": "good.json",
        "verdict": "accepted",
        "words": f"N = 1 at {TEXT} (1 step on A3/B; five: the rule is said to give 5)",
        "rule": "five still gives 5 there; its file is unchanged",
        "status": 0,
    }
    assert (bad["verdict"], bad["words"], bad["rule"], bad["status"]) == (
        "rejected",
        "the steps give N = 1, got value 5 in the claim",
        None,
        1,
    )
    assert (missing["verdict"], missing["rule"], missing["status"]) == ("unusable", None, 2)
    (gone,) = json.loads(run("good.json", "--json", "--rule", "nowhere.py::five").stdout)
    assert (gone["verdict"], gone["status"]) == ("accepted", 2)
    assert gone["rule"].startswith("expected conjcheck to ask the rule 'nowhere.py::five'")
