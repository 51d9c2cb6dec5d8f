"""The command ``conjcheck``: what it prints, where, and with which exit status."""

import json
import os
import pty
import re
import shlex
import subprocess
import sys

import pytest
from click.testing import CliRunner

from conjcheck import Case, Gr
from conjcheck.cli import main
from conjcheck.cli.audit import command
from conjcheck.geometry.symmetries import orbit_of_case
from conjcheck.oracle import audit as room
from conjcheck.oracle import engines_for


def run(*words, **options):
    """The command in this process."""
    return CliRunner().invoke(main, [*words], catch_exceptions=False, prog_name="conjcheck", **options)


def plant(monkeypatch, *texts):
    """Make the engine that answers on a space wrong by 1 at some cases."""
    cases = [Case.parse(text) for text in texts]
    kind = type(engines_for(cases[0].X)[0])
    honest = kind.row

    def row(self, u, v):
        terms = dict(honest(self, u, v))
        for case in cases:
            if (case.u, case.v) == (u, v):
                terms[case.w, case.d] = terms.get((case.w, case.d), 0) + 1
        return terms

    monkeypatch.setattr(kind, "row", row)


def table(output):
    """The lines of the table as lists of cells."""
    return [re.split(r"  +", line) for line in output.split("\n\n")[0].split("\n")]


def test_all_agree():
    """Status 0; a table with one line for each check, in columns; one line at the end; nothing on standard error, no colours."""
    done = run("audit", "Gr(1,3)", "B2/P1", "Gr(1,3)")
    assert done.exit_code == 0
    assert done.stderr == ""
    assert "\x1b" not in done.stdout
    head, *lines = table(done.stdout)
    assert head == ["space", "check", "compared", "result", "seconds"]
    assert {tuple(line[:1]) for line in lines} == {("Gr(1,3)",), ("Q^3",)}
    assert {line[3] for line in lines} == {"agree"}
    assert ["Gr(1,3)", "vafa-intriligator = recursion", "9 of 9 rows", "agree"] in [line[:4] for line in lines]
    assert ["Gr(1,3)", "mirror potential", "1 of 1 polynomial", "agree"] in [line[:4] for line in lines]
    assert done.stdout.endswith(f"{len(lines)} checks on 2 spaces: {len(lines)} agree; seed 0, 10 s for each space\n")


TWO = "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)"
DIVISOR = "Gr(2,4): (1) * (2) -> (2,1), q^(0)"
UNIT = "Gr(2,4): () * (1) -> (1), q^(0)"


@pytest.mark.parametrize(
    ("faults", "check", "smallest", "values"),
    [
        ((TWO,), "rim hooks", TWO, (2, 1)),
        ((TWO, DIVISOR), "quantum Chevalley", DIVISOR, (2, 1)),
        ((DIVISOR, TWO, UNIT), "unit", UNIT, (2, 1)),
        ((TWO,), "published products", TWO, (2, 1)),
        ((TWO,), "vafa-intriligator = localisation", TWO, (2, 1)),
    ],
)
def test_a_difference(faults, check, smallest, values, monkeypatch):
    """Status 1; the check says that it differs, at its smallest case, and shows both values."""
    plant(monkeypatch, *faults)
    done = run("audit", "Gr(2,4)")
    assert done.exit_code == 1
    line = next(line for line in table(done.stdout) if line[1] == check)
    assert re.fullmatch(r"differ: \d+", line[3])
    block = done.stdout.split(f"Gr(2,4), {check}: ")[1].split("\n")
    assert "differ" in block[0]
    assert block[1] == f"  at {smallest}"
    assert [int(line.split()[0]) for line in block[2:4]] == list(values)
    last = done.stdout.rstrip().rsplit("\n", 1)[1]
    assert re.search(r"checks on 1 space: \d+ agree, \d+ differ; seed 0", last)


def test_the_smallest_difference_of_all(monkeypatch):
    """Over all checks and spaces the smallest case is named last, with the check that found it, both values, and what to do."""
    plant(monkeypatch, DIVISOR, "Gr(2,5): (2) * (2) -> (2,2)")
    done = run("audit", "Gr(2,5)", "Gr(2,4)")
    assert done.exit_code == 1
    ending = done.stdout.split("smallest difference: ")[1].split("\n")
    assert ending[0] in {"S3-symmetry", "Seidel symmetry"}
    named = Case.parse(ending[1].removeprefix("  at "))
    assert named < Case.parse(DIVISOR)
    assert named in orbit_of_case(Case.parse(DIVISOR))
    assert len({int(line.split()[0]) for line in ending[2:4]}) == 2
    assert "trust no verdict of this version on this space" in ending[4]


def test_json():
    """One document: seed, budget, every check with its counts; nothing else on standard output."""
    done = run("audit", "Gr(1,2)", "Fl(3)", "--json", "--seed", "7", "--seconds", "20")
    assert done.exit_code == 0
    document = json.loads(done.stdout)
    assert {key: document[key] for key in ("seed", "seconds", "result", "smallest")} == {
        "seed": 7,
        "seconds": 20.0,
        "result": "agree",
        "smallest": None,
    }
    assert [space["space"] for space in document["spaces"]] == ["Gr(1,2)", "Fl(3)"]
    for space in document["spaces"]:
        for check in space["checks"]:
            assert set(check) == {
                *("check", "unit", "of", "compared", "first", "differing", "result", "why", "seconds", "difference"),
            }
            assert (check["result"], check["differing"], check["difference"]) == ("agree", 0, None)
            assert check["compared"] == check["of"] == check["first"]


def test_json_of_a_difference(monkeypatch):
    """The document holds the smallest difference: space, check, case, both values with how they were found; the status is still 1."""
    plant(monkeypatch, UNIT)
    done = run("audit", "Gr(2,4)", "--json")
    assert done.exit_code == 1
    document = json.loads(done.stdout)
    assert document["result"] == "differ"
    assert (document["smallest"]["space"], document["smallest"]["case"]) == ("Gr(2,4)", UNIT)
    assert sorted(pair["value"] for pair in document["smallest"]["values"]) == [1, 2]
    (unit,) = [check for check in document["spaces"][0]["checks"] if check["check"] == "unit"]
    assert (unit["result"], unit["differing"], unit["difference"]["case"]) == ("differ", 1, UNIT)
    assert unit["difference"]["values"] == [{"how": "product", "value": 2}, {"how": "unit", "value": 1}]


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ([], "expected a space such as 'Gr(2,5)', or --rank N, got neither"),
        (["Gr(5,2)"], "got step 5 in Fl(5;2)"),
        (["Klein"], "expected a flag variety such as"),
        (
            ["Gr(2,4)", "--most-classes", "5"],
            "expected --rank together with --most-classes, got --most-classes 5 alone; add --rank N",
        ),
        (["Gr(2,4)", "--seconds", "0"], "0.0 is not in the range x>0"),
        (["Gr(2,4)", "--seed", "-1"], "-1 is not in the range x>=0"),
        (["--rank", "0"], "0 is not in the range 1<=x<=8"),
        (["Gr(2,4)", "--spaces", "3"], "No such option"),
        (["E6/P3,4"], "expected spaces in reach of some engine, got E6/P3,4 (vafa-intriligator: E6/P3,4 is not a Grassmannian"),
        (["Gr(1,2)", "E8/B"], "leave it out"),
        (["A201/P1"], "expected a rank of at most 200"),
        (["--rank", "6", "--most-classes", "5000"], "lower --most-classes"),
    ],
)
def test_wrong_usage_and_out_of_reach(words, message, monkeypatch):
    """Status 2, a message that says what was expected and what came, before anything is compared."""
    monkeypatch.setattr(room, "audit", lambda *_args, **_options: pytest.fail("nothing may be compared"))
    done = run("audit", *words)
    assert done.exit_code == 2
    assert message in done.stderr.replace("\n", " ")
    assert done.stdout == ""


def seen(monkeypatch):
    """What would be audited, with which options."""
    calls = []

    def record(X, *, seconds, seed, watching):
        calls.append((X.name, seconds, seed))
        return [room.Result(X, "nothing", "rows", 1, 1, 1)]

    monkeypatch.setattr(room, "audit", record)
    return calls


def test_all_spaces_of_a_rank(monkeypatch):
    """``--rank`` takes all types in order, names come first, nothing twice, none with too many classes."""
    calls = seen(monkeypatch)
    assert run("audit", "Fl(3)", "--rank", "2").exit_code == 0
    assert [name for name, *_ in calls] == [
        *["Fl(3)", "Gr(1,2)", "Gr(1,3)", "Gr(2,3)"],
        *["Q^3", "OG(2,5)", "IG(1,4)", "LG(2,4)", "G2/P1", "G2/P2", "B2/B", "C2/B", "G2/B"],
    ]
    calls.clear()
    assert run("audit", "--rank", "2", "--most-classes", "3").exit_code == 0
    assert [name for name, *_ in calls] == ["Gr(1,2)", "Gr(1,3)", "Gr(2,3)"]


def test_the_examples_of_the_help_are_commands(monkeypatch):
    """Every example in the help text is understood; the help names every exit status and every kind of check."""
    text = run("audit", "--help").stdout
    examples = re.findall(r"^ +conjcheck (audit .*)$", text, re.MULTILINE)
    assert len(examples) >= 4
    calls = seen(monkeypatch)
    for example in examples:
        calls.clear()
        assert run(*shlex.split(example)).exit_code == 0
        assert calls
    assert calls[-1] == ("Fl(6)", 120.0, 7)
    for words in ("0 nothing differs", "1 a difference", "2 wrong usage", "Seidel", "published", "mirror", "engines"):
        assert words in re.sub(r"\s+", " ", text)
    assert all(len(line) <= 80 for line in text.splitlines())


def test_what_was_not_run_is_said(monkeypatch):
    """Without sympy the mirror check says "not run: needs sympy", and the last line counts it."""
    monkeypatch.setattr(room, "has_sympy", lambda: False)
    done = run("audit", "Gr(1,3)")
    assert done.exit_code == 0
    assert re.search(r"Gr\(1,3\)  mirror potential +0 of 1 polynomial \(first 0\)  not run: needs sympy", done.stdout)
    assert re.search(r"\d+ agree, 1 not run; seed 0", done.stdout)


def test_how_far_it_got(monkeypatch):
    """What the budget did not reach, and what was left out, stands in the table and below it."""
    results = [room.Result(Gr(2, 5), "S3-symmetry", "rows", 14400, 341, 1347, why="12 left out: they take too long")]
    monkeypatch.setattr(room, "audit", lambda X, **options: results)
    done = run("audit", "Gr(2,5)")
    assert "1,347 of 14,400 rows (first 341)" in done.stdout
    assert "Gr(2,5), S3-symmetry: 12 left out: they take too long" in done.stdout


def test_colours(monkeypatch):
    """On a terminal results are coloured; with NO_COLOR nothing is."""
    monkeypatch.delenv("NO_COLOR", raising=False)
    assert "\x1b[32m" in run("audit", "Gr(1,2)", color=True).stdout
    monkeypatch.setenv("NO_COLOR", "1")
    assert "\x1b" not in run("audit", "Gr(1,2)", color=True).stdout


def test_interrupted(monkeypatch):
    """Control-C: what is finished is printed, the rest is said to be missing, the status is 130."""

    def audit(X, *, seconds, seed, watching):
        if X is Gr(1, 3):
            raise KeyboardInterrupt
        return [room.Result(X, "unit", "classes", 2, 2, 2)]

    monkeypatch.setattr(room, "audit", audit)
    done = run("audit", "Gr(1,2)", "Gr(1,3)")
    assert done.exit_code == 130
    assert "Gr(1,2)" in done.stdout
    assert done.stdout.endswith("interrupted: the spaces that are missing above were not compared\n")
    assert json.loads(run("audit", "Gr(1,2)", "Gr(1,3)", "--json").stdout)["result"] == "interrupted"


def test_a_bar_on_a_terminal_only():
    """On a terminal a bar runs on standard error; standard output holds the same as without."""
    outer, inner = pty.openpty()
    words = [sys.executable, "-m", "conjcheck", "audit", "Gr(1,2)"]
    try:
        done = subprocess.run(words, stdout=subprocess.PIPE, stderr=inner, text=True, check=False, timeout=60)
    finally:
        os.close(inner)
    shown = b""
    try:
        while part := os.read(outer, 4096):
            shown += part
    except OSError:  # the other end is closed
        pass
    os.close(outer)
    assert done.returncode == 0
    assert b"audit" in shown
    assert b"100%" in shown
    assert "%" not in done.stdout
    plain = subprocess.run(words, capture_output=True, text=True, check=False, timeout=60)
    assert plain.stderr == ""
    assert [line[:4] for line in table(plain.stdout)] == [line[:4] for line in table(done.stdout)]


def test_version_and_group():
    """``conjcheck --version`` and ``conjcheck --help``; without a command the help is shown."""
    from conjcheck import __version__

    assert run("--version").stdout == f"conjcheck, version {__version__}\n"
    assert "audit" in run("--help").stdout
    assert run("-h").stdout == run("--help").stdout
    assert command.name == "audit"


def test_the_command_is_light():
    """Importing the command loads click and the standard library, nothing that computes."""
    code = "import sys, conjcheck.cli; print([m for m in ('numpy', 'hypothesis', 'sympy', 'pytest') if m in sys.modules])"
    assert subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.strip() == "[]"


def test_the_script_is_declared():
    """The project file declares the script ``conjcheck`` and what it needs."""
    import tomllib
    from pathlib import Path

    project = tomllib.loads((Path(__file__).parents[2] / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert project["scripts"] == {"conjcheck": "conjcheck.cli:main"}
    assert any(line.startswith("click") for line in project["dependencies"])
