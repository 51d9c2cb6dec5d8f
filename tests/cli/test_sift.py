"""The command ``conjcheck sift``: what it prints, where, and with which exit status."""

import json
import os
import pty
import re
import subprocess
import sys
from pathlib import Path

import pytest
from click.testing import CliRunner

from conjcheck.cli import main
from conjcheck.testing import sift as room

PAGE = str(Path(__file__).parents[2] / "conjectures" / "pieri_inequalities.py")
POWERS = """
from conjcheck import ProjectiveSpaces, candidate

def power(X, total):
    return {(X.of_length(total % X.n)[0], (total // X.n,)): 1}

@candidate(on=ProjectiveSpaces(), variants={"kind": ("right", "same", "late", "crash")})
def powers(X, u, v, *, kind):
    if kind == "crash" and X.n == 3:
        raise ValueError("no")
    return {} if kind == "late" and X.n > 5 else power(X, u.length + v.length)

@candidate(on=ProjectiveSpaces(), variants={"zero": (0,)})
def nothing(X, u, v, *, zero):
    return {}

@candidate(on=ProjectiveSpaces(), premise=lambda X, u, v: False, variants={"zero": (0, 1)})
def nowhere(X, u, v, *, zero):
    return {}
"""


@pytest.fixture
def file(tmp_path):
    """A plug-in file with three conjectures."""
    path = tmp_path / "powers.py"
    path.write_text(POWERS)
    return str(path)


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["sift", *words], catch_exceptions=False, prog_name="conjcheck")


def labelled(output):
    """The labelled lines at the end."""
    return dict(re.split(r"  +", line, maxsplit=1) for line in output.split("\n\n")[-1].strip().split("\n"))


def test_one_survives():
    """Status 0; a line for each dead variant with its smallest counterexample and both values; the survivor with the scope."""
    done = run(PAGE, "--up-to", "5")
    assert done.exit_code == 0
    assert done.stderr == ""
    assert "\x1b" not in done.stdout
    head, *lines = [re.split(r"  +", line) for line in done.stdout.split("\n\n")[0].split("\n")]
    assert head == ["variant", "status", "smaller cases", "fails at", "rule", "oracle"]
    assert len(lines) == 71
    assert lines[-1] == [
        "along='rows', apart=0, taken=1, spared=2, highest=1",
        *("refuted", "96", "Gr(2,5): (1) * (2,2) -> (), q^(1)", "1", "0"),
    ]
    found = labelled(done.stdout)
    assert found["dead"] == "71 of 72 variants, in 7 ways"
    assert found["alive"] == "along='rows', apart=0, taken=1, spared=1, highest=1"
    assert found["compared"].startswith("of the 10 spaces named: all 10 spaces from Gr(1,2) to Gr(3,5); 114 rows, ")
    assert "beyond" not in found


def test_survivors_that_may_be_one_function(file):
    """Several survivors are listed, with what was looked at beyond; a crash and a late failure say what they are."""
    done = run(f"{file}::powers", "Gr(1,2)", "Gr(1,3)")
    assert done.exit_code == 0
    assert "kind='right'" in done.stdout
    assert "kind='same'" in done.stdout
    assert "survivors    the 2 never differ on what was looked at: they may be one function" in done.stdout
    assert "rows drawn at random on Gr(1,4) to" in labelled(done.stdout)["beyond"]
    lines = {line[0]: line[1:] for line in (re.split(r"  +", line) for line in done.stdout.split("\n\n")[0].split("\n"))}
    assert lines["kind='crash'"] == ["crashed", "4", "Gr(1,3): () * ()"]
    status, below, where, *_ = lines["kind='late'"]
    assert (status, below) == ("refuted", "13")
    assert where.endswith("(not known to be minimal)")


def test_survivors_that_differ(file, monkeypatch):
    """Where no engine reaches and survivors differ, they are shown in classes with the first row found."""
    monkeypatch.setattr(room, "_quick_truth", lambda together, row, slow: None)
    done = run(f"{file}::powers", "Gr(1,2)")
    assert done.exit_code == 0
    assert re.search(r"survivors    fall into 2 classes: they differ first, of the rows drawn, at Gr\(1,[678]\): ", done.stdout)


def test_none_survives(file):
    """Status 1 if every variant is dead."""
    done = run(f"{file}::nothing", "--up-to", "3")
    assert done.exit_code == 1
    found = labelled(done.stdout)
    assert found["alive"] == "none"
    assert found["dead"] == "1 of 1 variants, in 1 way"
    assert found["compared"] == "no row that a variant got through"


def test_nothing_compared_is_no_survival(file):
    """Status 2 if no row was compared: that must not be taken for survival."""
    done = run(f"{file}::nowhere", "--up-to", "4")
    assert done.exit_code == 2
    assert done.stdout == ""
    assert "no variant was compared" in done.stderr


def test_json(file):
    """One document, with the same statuses."""
    done = run(f"{file}::powers", "--up-to", "4", "--json")
    assert done.exit_code == 0
    document = json.loads(done.stdout)
    assert document["conjecture"] == "powers"
    assert document["variants"] == len(document["dead"]) + sum(map(len, document["survivors"]))
    assert run(f"{file}::nothing", "--up-to", "3", "--json").exit_code == 1


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["nowhere.py"], "expected a plug-in file such as conjectures/my_rule.py, got nowhere.py"),
        (["FILE"], "choose one: "),
        (["FILE::other"], "expected one of powers, nothing, nowhere in"),
        (["FILE::powers", "Klein"], "expected a flag variety such as"),
        (["FILE::powers", "Fl(3)"], "expected spaces of projective spaces, got Fl(3)"),
        (["FILE::powers", "--seconds", "0"], "is not in the range x>0"),
        (["FILE::powers", "--up-to", "1"], "is not in the range x>=2"),
        ([], "Missing argument"),
    ],
)
def test_wrong_usage(words, message, file):
    """Status 2 and a message that says what was expected."""
    done = run(*(word.replace("FILE", file) for word in words))
    assert done.exit_code == 2
    assert message in done.stderr.replace("\n", " ")


def test_interrupted(file, monkeypatch):
    """Ctrl-C ends with status 130."""

    def stop(*args, **choices):
        raise KeyboardInterrupt

    monkeypatch.setattr(room, "sift", stop)
    done = run(f"{file}::powers")
    assert (done.exit_code, done.stdout, done.stderr) == (130, "", "interrupted\n")


def test_a_bar_on_a_terminal_only(file):
    """On a terminal standard error shows a bar; standard output stays the table."""
    outer, inner = pty.openpty()
    words = [sys.executable, "-m", "conjcheck", "sift", f"{file}::powers", "--up-to", "6"]
    with subprocess.Popen(words, stdout=subprocess.PIPE, stderr=inner) as child:
        os.close(inner)
        shown = b""
        while True:
            try:
                piece = os.read(outer, 4096)
            except OSError:
                break
            if not piece:
                break
            shown += piece
        stdout = child.stdout.read().decode()
    os.close(outer)
    assert child.returncode == 0
    assert b"sift" in shown
    assert b"alive" in shown
    assert stdout.startswith("variant")
    assert "%" not in stdout
