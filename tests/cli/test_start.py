"""The command ``conjcheck start``: what it writes runs at once, and nothing is overwritten."""

import re
import subprocess
import sys
from pathlib import Path

import pytest
import yaml
from click.testing import CliRunner

from conjcheck.cli import main
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.geometry import families

FAMILIES = [name for name in families.__all__ if name not in ("Family", "Varieties", "StepFlags")]
KINDS = [(), ("--claim",), ("--products",), ("--claim", "--products")]


@pytest.fixture
def here(tmp_path, monkeypatch):
    """An empty repository."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["start", *words], catch_exceptions=False, prog_name="conjcheck")


def examined(folder, name, *more):
    """The final table of pytest on a folder: the status of each conjecture; and the run."""
    (folder / "pytest.ini").write_text("[pytest]\nconjcheck_budget = 0.3\nfilterwarnings = error\n")
    words = [
        sys.executable,
        "-m",
        "pytest",
        name,
        "--conjcheck-effort",
        "quick",
        "--hypothesis-seed=1",
        "-pno:cacheprovider",
        *more,
    ]
    done = subprocess.run(words, cwd=folder, capture_output=True, text=True, check=False)
    return dict(re.findall(r"^(\w+)\s+(agrees|refuted|undefined|crashed)\b", done.stdout, re.MULTILINE)), done


@pytest.mark.parametrize("parts", [["-k", "survey"], pytest.param([], marks=pytest.mark.slow)], ids=["quick", "whole"])
def test_every_family_and_kind_runs_at_once(parts, here):
    """What is written for each family, for spaces, and as each of the four kinds of conjecture, agrees under pytest as it is."""
    expected = {}
    for name in FAMILIES:
        assert run(f"on_{name.lower()}", "--on", name).exit_code == 0
        expected[f"on_{name.lower()}"] = "agrees"
    for k, kind in enumerate(KINDS):
        assert run(f"kind_{k}", "--on", "Gr(2,5)", "--on", "F4/P1", *kind).exit_code == 0
        assert run(f"steps_{k}", "--on", "StepFlags(2)", *kind).exit_code == 0
        expected |= {f"kind_{k}": "agrees", f"steps_{k}": "agrees"}
    table, done = examined(here, "conjectures", *parts)
    assert done.returncode == 0, done.stdout
    assert table == expected


def test_the_placeholder_can_fail(here):
    """The rule that is written is compared: spoilt by one character it is refuted."""
    run("mine", "--on", "Grassmannians")
    page = here / "conjectures" / "mine.py"
    page.write_text(page.read_text().replace("int(w == v", "int(w != v"))
    table, done = examined(here, "conjectures/mine.py")
    assert done.returncode == 1
    assert table == {"mine": "refuted"}


@pytest.mark.parametrize(
    ("about", "code", "views"),
    [
        (["Grassmannians"], "Grassmannians()", "u.partition, u.permutation, u.string, u.word, u.descents"),
        (["grassmannians()"], "Grassmannians()", "u.partition"),
        (["Gr(2,5)"], 'Varieties("Gr(2,5)")', "u.partition"),
        (["A4/P2", "Fl(4)"], 'Varieties("Gr(2,5)", "Fl(4)")', "u.permutation, u.string"),
        (["StepFlags(2)"], "StepFlags(2)", "u.permutation"),
        (["LagrangianGrassmannians"], "LagrangianGrassmannians()", "u.partition, u.signed"),
        (['CompleteFlags(types="BC")'], 'CompleteFlags(types="BC")', "u.signed, u.word"),
        (["HomogeneousSpaces('G')"], "HomogeneousSpaces('G')", "u.word"),
    ],
)
def test_what_it_is_about(about, code, views, here):
    """``--on`` takes a family, with arguments or without, in any case, or spaces; the page names the notations that they have."""
    assert run("mine", *(word for name in about for word in ("--on", name))).exit_code == 0
    text = (here / "conjectures" / "mine.py").read_text()
    assert f"    on={code}," in text
    assert f"u.length, u.dual, {views}" in text
    assert max(map(len, text.splitlines())) <= 140
    (found,) = conjectures_in_file(here / "conjectures" / "mine.py")
    assert found.name == "mine"


def test_the_page_is_tidy(here):
    """Linter and formatter have nothing to say about the pages."""
    for k, kind in enumerate(KINDS):
        run(f"kind_{k}", "--on", "Grassmannians", *kind)
    ruff = [sys.executable, "-m", "ruff"]
    for words in (["check", "--select", "E,F,I,D2,UP"], ["format", "--check"]):
        done = subprocess.run([*ruff, *words, "--line-length", "132", "conjectures"], capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stdout


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ([], "expected a NAME for the rule, or --workflow, got neither"),
        (["mine"], "expected a family, --on Grassmannians, or a space, --on 'Gr(2,5)', got none"),
        (["a-b", "--on", "Grassmannians"], "got 'a-b'; write a_b"),
        (["2b", "--on", "Grassmannians"], "such as my_rule, got '2b'"),
        (["../b", "--on", "Grassmannians"], "got '../b'"),
        (["class", "--on", "Grassmannians"], "such as my_rule, got 'class'"),
        (["_helper", "--on", "Grassmannians"], "pytest takes such files for helpers"),
        (["conftest", "--on", "Grassmannians"], "pytest takes such files for helpers"),
        (["statistics", "--on", "Grassmannians"], "expected a name that hides no module, got 'statistics'"),
        (["numpy", "--on", "Grassmannians"], "expected a name that hides no module, got 'numpy'"),
        (["product", "--on", "Grassmannians"], "expected a name that conjcheck itself does not use, got 'product'"),
        (["mine", "--on", "Grasmannians"], "did you mean Grassmannians?"),
        (["mine", "--on", "Gr(5,2)"], "got step 5 in Fl(5;2)"),
        (["mine", "--on", "StepFlags"], "expected a family such as StepFlags(2) for --on, got 'StepFlags'"),
        (["mine", "--on", "StepFlags(0)"], "expected a number of steps of 1 or more"),
        (["mine", "--on", "StepFlags(__import__('os'))"], "expected a family such as StepFlags(2)"),
        (["mine", "--on", "Grassmannians().where(len)"], "expected a family such as Grassmannians()"),
        (["mine", "--on", "Grassmannians", "--on", "Gr(2,5)"], "expected one family, or spaces only"),
        (["--workflow", "--claim"], "expected a NAME together with --on, --claim or --products"),
    ],
)
def test_refusals(words, message, here):
    """Status 2, a message that says what was expected, and nothing is written."""
    done = run(*words)
    assert done.exit_code == 2
    assert message in done.stderr.replace("\n", " ")
    assert list(here.iterdir()) == []


def test_nothing_is_overwritten(here):
    """A file that is there stays as it is, a record of the name keeps it, and then nothing else is written either."""
    (here / "conjectures").mkdir()
    (here / "conjectures" / "mine.py").write_text("# mine\n")
    done = run("mine", "--on", "Grassmannians", "--workflow")
    assert done.exit_code == 2
    assert "expected a new file, got conjectures/mine.py, which is there" in done.stderr
    assert (here / "conjectures" / "mine.py").read_text() == "# mine\n"
    assert not (here / ".github").exists()
    (here / "conjectures" / "records").mkdir()
    (here / "conjectures" / "records" / "other.json").write_text("{}")
    assert "expected a name without a record, got 'other'" in run("other", "--on", "Grassmannians").stderr


def test_a_folder_that_cannot_be_made(here):
    """Status 2 with the reason."""
    (here / "conjectures").write_text("a file")
    done = run("mine", "--on", "Grassmannians", "--folder", "conjectures/deeper")
    assert done.exit_code == 2
    assert "expected a file that can be written" in done.stderr


def test_another_folder(here):
    """``--folder`` says where, and the page and the last line speak of that place."""
    done = run("mine", "--on", "Grassmannians", "--folder", "rules/new")
    assert done.stdout == (
        "wrote rules/new/mine.py\nwrote rules/new/.gitignore\nnext: pytest rules/new/mine.py --conjcheck-effort quick\n"
    )
    assert "    pytest rules/new/mine.py\n" in (here / "rules" / "new" / "mine.py").read_text()


def test_a_folder_with_a_blank(here):
    """The line to copy and the line in the page are quoted for a shell."""
    done = run("mine", "--on", "Gr(1,3)", "--folder", "my rules")
    assert "next: pytest 'my rules/mine.py' --conjcheck-effort quick\n" in done.stdout
    assert "    pytest 'my rules/mine.py'\n" in (here / "my rules" / "mine.py").read_text()


def test_the_ledger_is_ignored_by_git(here):
    """The folder gets a line for the ledger, once, after what its ``.gitignore`` holds already."""
    path = here / "conjectures" / ".gitignore"
    path.parent.mkdir()
    path.write_text("*.aux")
    assert f"wrote {path.relative_to(here)}\n" in run("one", "--on", "Gr(1,3)").stdout
    assert path.read_text() == "*.aux\n.ledger.sqlite*\n"
    assert ".gitignore" not in run("two", "--on", "Gr(1,3)").stdout
    assert path.read_text() == "*.aux\n.ledger.sqlite*\n"


@pytest.mark.parametrize(
    ("project", "place", "install"),
    [
        ("", "./conjcheck", '"$CONJCHECK"'),
        ("[tool.ruff]\n", "./conjcheck", '"$CONJCHECK"'),
        ('[project]\nname = "our-rules"\n', "./conjcheck", '"$CONJCHECK" .'),
        ('[project]\nname = "conjcheck"\n', ".", '"$CONJCHECK"'),
    ],
)
def test_the_workflow(project, place, install, here):
    """The workflow file is YAML with the steps in order: the sources, Python, installation, pytest on the folder, the report always.
    conjcheck comes from the place of a clone, which the user is told to enter unless this is one."""
    if project:
        (here / "pyproject.toml").write_text(project)
    done = run("--workflow", "--folder", "rules", "--workflow-folder", "flows")
    assert done.stdout.startswith("wrote flows/conjectures.yml\n")
    assert ("put the place of your clone of conjcheck at CONJCHECK" in done.stdout) == (place != ".")
    document = yaml.safe_load((here / "flows" / "conjectures.yml").read_text())
    assert document["env"] == {"CONJCHECK": place}
    install = f"python -m pip install {install}"
    assert document[True] == ["push", "pull_request"]  # "on", as YAML 1.1 reads it
    assert document["permissions"] == {"contents": "read"}
    (job,) = document["jobs"].values()
    steps = job["steps"]
    assert [step.get("uses", "").split("@")[0] or step["run"] for step in steps] == [
        *("actions/checkout", "actions/setup-python", install),
        *("pytest rules --conjcheck-report report --junitxml report/conjectures.xml", "actions/upload-artifact"),
    ]
    assert steps[-1]["if"] == "always()"
    assert Path(steps[-1]["with"]["path"]) == Path("report")


def test_the_command_of_the_workflow_works(here):
    """What the workflow runs leaves a report and a junit file."""
    run("mine", "--on", "Gr(1,3)", "--workflow")
    (here / "pytest.ini").write_text("[pytest]\nconjcheck_effort = quick\nconjcheck_budget = 0.3\n")
    document = yaml.safe_load((here / ".github" / "workflows" / "conjectures.yml").read_text())
    (words,) = [step["run"] for step in document["jobs"]["examine"]["steps"] if step.get("name") == "Examine"]
    done = subprocess.run([sys.executable, "-m", *words.split()], cwd=here, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout
    assert {path.name for path in (here / "report").iterdir()} >= {"conjectures.xml", "index.html"}
