"""The help of every command: its examples are run, its exit statuses are named, and a shell can complete its arguments."""

import contextlib
import os
import pty
import re
import shutil
import subprocess
import sys
from pathlib import Path

import click
import pytest
from click.testing import CliRunner

from conjcheck.cli import COMMANDS, main
from conjcheck.errors import ConjcheckError

ROOT = Path(__file__).parents[2]
SLOW = re.compile(r"^pytest conjectures |--rank|E6/P1|--seconds 120|--up-to [5-9]|--effort normal|--cluster|Gr\(4,8\)")
"""Examples that take more than a few seconds: they are run with the slow tests."""


def help_of(*words):
    """A help text."""
    done = CliRunner().invoke(main, [*words, "--help"], prog_name="conjcheck", terminal_width=80)
    assert done.exit_code == 0
    return done.stdout


def examples_in(text):
    """The command lines under "Examples:"."""
    found = re.search(r"^ *Examples:\n((?: +\S.*\n)+)", text, re.MULTILINE)
    return [line.strip() for line in found[1].splitlines()] if found else []


def environment(folder):
    """The commands of this interpreter first, quick examinations, no colours from outside."""
    path = f"{Path(sys.executable).parent}{os.pathsep}{os.environ['PATH']}"
    return {**os.environ, "PATH": path, "PYTEST_ADDOPTS": "--conjcheck-effort quick --conjcheck-budget 0.2", "HOME": str(folder)}


@pytest.fixture(scope="module")
def bundled(tmp_path_factory):
    """A repository like the one the help speaks of: the bundled conjectures, and ``my_rule``, refuted and on record."""
    folder = tmp_path_factory.mktemp("help")
    shutil.copytree(ROOT / "conjectures", folder / "conjectures", ignore=shutil.ignore_patterns("__pycache__", ".*"))
    page = (folder / "conjectures" / "lantern_rule.py").read_text().replace("lantern_rule", "my_rule")
    (folder / "conjectures" / "my_rule.py").write_text(page)
    words = [sys.executable, "-m", "pytest", "-q", "conjectures/my_rule.py", "--conjcheck-record"]
    done = subprocess.run(words, cwd=folder, env=environment(folder), capture_output=True, text=True, check=False)
    records = folder / "conjectures" / "records"
    assert (records / "my_rule.json").exists(), done.stdout
    for whose in ("mine", "yours"):
        (folder / whose).mkdir()
        shutil.copy(records / "my_rule.json", folder / whose / "rule.json")
    shutil.copy(next(records.glob("my_rule.*.certificate.json")), folder / "proof.json")
    return folder


def run_examples(command, bundled, folder, *, slow):
    """Run the examples of one command there, one after the other."""
    shutil.copytree(bundled, folder, dirs_exist_ok=True)
    if command in ("start", ""):
        for path in folder.glob("conjectures/**/my_*"):
            path.unlink()
    ran = 0
    for line in examples_in(help_of(command) if command else help_of()):
        assert line.startswith(("conjcheck ", "pytest ")), line
        if bool(SLOW.search(line)) != slow:
            continue
        short = re.sub(r"--seconds \S+", "--seconds 0.5", line)
        done = subprocess.run(
            ["bash", "-c", short], cwd=folder, env=environment(folder), capture_output=True, text=True, timeout=300, check=False
        )
        assert done.returncode == 0, f"{line}\n{done.stdout}\n{done.stderr}"
        assert "Traceback" not in done.stderr
        ran += 1
    return ran


@pytest.mark.parametrize("command", ["", *COMMANDS])
def test_examples_run(command, bundled, tmp_path):
    """Every example in the help of a command is a command line that ends well on the bundled conjectures."""
    run_examples(command, bundled, tmp_path, slow=False)
    assert examples_in(help_of(command) if command else help_of())


@pytest.mark.slow
@pytest.mark.parametrize("command", COMMANDS)
def test_slow_examples_run(command, bundled, tmp_path):
    """So do those that take longer, with a smaller budget."""
    run_examples(command, bundled, tmp_path, slow=True)


@pytest.mark.parametrize("command", ["", *COMMANDS])
def test_exit_statuses_are_named(command):
    """Every help text names the exit statuses, 0 and 2 at least."""
    text = help_of(command) if command else help_of()
    said = text.split("Exit status")[1].split("Options:")[0]
    assert {"0", "2"} <= set(re.findall(r"\b\d+\b", said))


def test_the_first_help_names_everything():
    """``conjcheck --help`` lists every command, all four statuses, NO_COLOR, --json, and the line for completion."""
    text = help_of()
    for command in COMMANDS:
        assert re.search(rf"^  {command} ", text, re.MULTILINE)
    assert re.findall(r"^ +(0|1|2|130) {2,}\S", text.split("Exit status:")[1], re.MULTILINE) == ["0", "1", "2", "130"]
    for word in ("NO_COLOR=1", "--json", 'eval "$(_CONJCHECK_COMPLETE=bash_source conjcheck)"'):
        assert word in text


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize(
    ("error", "status", "said"),
    [
        (KeyboardInterrupt(), 130, "interrupted\n"),
        (ConjcheckError("expected this, got that"), 2, "Error: expected this, got that\n"),
        (ZeroDivisionError("unforeseen"), 2, "ZeroDivisionError: unforeseen\n"),
    ],
)
def test_what_ends_a_command_is_not_taken_for_a_result(command, error, status, said, monkeypatch):
    """Ctrl-C is status 130 in every command, and an error, foreseen or not, is 2 and is shown: 1 would say that something was found."""

    def stop(*args, **choices):
        raise error

    found = main.get_command(click.Context(main), command)
    monkeypatch.setattr(found, "invoke", stop)
    monkeypatch.setattr(found, "make_context", lambda *args, parent=None, **choices: click.Context(found, parent=parent))
    done = CliRunner().invoke(main, [command], prog_name="conjcheck")
    assert (done.exit_code, done.stdout) == (status, "")
    assert done.stderr.endswith(said)


@pytest.mark.parametrize(("told", "coloured"), [({}, True), ({"NO_COLOR": "1"}, False), ({"NO_COLOR": ""}, True)])
def test_no_color(told, coloured):
    """On a terminal verdicts are coloured, unless NO_COLOR is set and not empty."""
    outer, inner = pty.openpty()
    words = [str(Path(sys.executable).parent / "conjcheck"), "sift", "conjectures/pieri_inequalities.py", "Gr(1,3)", "Gr(2,3)"]
    env = {key: value for key, value in os.environ.items() if key != "NO_COLOR"} | told
    with subprocess.Popen(words, cwd=ROOT, env=env, stdout=inner, stderr=subprocess.DEVNULL) as child:
        os.close(inner)
        shown = b""
        with contextlib.suppress(OSError):  # the end, on Linux
            while piece := os.read(outer, 4096):
                shown += piece
    os.close(outer)
    assert child.returncode == 0
    assert b"alive" in shown
    assert (b"\x1b[" in shown) == coloured


# -- completion ----------------------------------------------------------------------------------------------------------


def complete(*words, last="", shell="zsh", cwd=ROOT):
    """What the shell is offered for the last word of a line."""
    line = " ".join(["conjcheck", *words, last])
    told = {"COMP_WORDS": line, "COMP_CWORD": str(len(words) + 1), "_CONJCHECK_COMPLETE": f"{shell}_complete"}
    program = str(Path(sys.executable).parent / "conjcheck")
    done = subprocess.run([program], env={**os.environ, **told}, cwd=cwd, capture_output=True, text=True, check=True)
    if not done.stdout.strip():
        return []
    if shell == "bash":
        return [tuple(line.split(",", 1)) for line in done.stdout.splitlines()]
    lines = done.stdout.splitlines()
    return list(zip(lines[::3], lines[1::3], strict=True))


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_the_line_for_completion_works(shell):
    """``_CONJCHECK_COMPLETE=bash_source conjcheck`` prints a script for the shell, and bash accepts it."""
    program = str(Path(sys.executable).parent / "conjcheck")
    told = {**os.environ, "_CONJCHECK_COMPLETE": f"{shell}_source"}
    done = subprocess.run([program], env=told, capture_output=True, text=True, check=True)
    assert "_CONJCHECK_COMPLETE=" in done.stdout
    if shell == "bash":
        subprocess.run(["bash", "-n"], input=done.stdout, text=True, check=True)


def test_commands_complete():
    """The commands are offered, in bash, too."""
    assert {name for _, name in complete(shell="bash")} >= set(COMMANDS)


@pytest.mark.parametrize("command", COMMANDS)
def test_arguments_complete(command, tmp_path):
    """Wherever a command takes a space or a plug-in file, such are offered."""
    (tmp_path / "conjectures").mkdir()
    (tmp_path / "conjectures" / "mine.py").write_text("")
    found = main.get_command(click.Context(main), command)
    words = [command]
    for parameter in found.params:
        if not isinstance(parameter, click.Argument):
            continue
        metavar = (parameter.metavar or parameter.name).upper()
        if "SPACE" in metavar:
            assert ("plain", "A3/P1,2") in complete(*words, last="A3/", cwd=tmp_path)
            assert ("plain", "LG(3,6)") in complete(*words, last="LG", cwd=tmp_path)
        elif "::" in metavar:
            assert complete(*words, last="conj", cwd=tmp_path) == [("plain", "conjectures/")]
            assert complete(*words, last="conjectures/m", cwd=tmp_path) == [("plain", "conjectures/mine.py")]
        elif metavar.strip("[].") in ("TARGET", "CERTIFICATE", "RECORD", "FILE"):
            assert complete(*words, last="conj", cwd=tmp_path) == [("file", "conj")]
        words.append("x")


def test_names_in_a_file_complete(tmp_path):
    """After ``FILE::`` the conjectures of the file are offered; a broken file offers nothing."""
    (tmp_path / "two.py").write_text(
        "from conjcheck import Grassmannians, candidate\n"
        "@candidate(on=Grassmannians())\ndef first(X, u, v):\n    return {}\n"
        "@candidate(on=Grassmannians())\ndef second(X, u, v):\n    return {}\n"
    )
    (tmp_path / "broken.py").write_text("(")
    assert complete("sift", last="two.py::", cwd=tmp_path) == [("plain", "two.py::first"), ("plain", "two.py::second")]
    assert complete("sift", last="two.py::s", cwd=tmp_path) == [("plain", "two.py::second")]
    assert complete("sift", last="broken.py::", cwd=tmp_path) == []


def test_families_complete():
    """``--on`` offers families and spaces."""
    assert ("plain", "Grassmannians") in complete("start", "x", "--on", last="Gr")
    assert ("plain", "Gr(2,5)") in complete("start", "x", "--on", last="Gr")


@pytest.mark.parametrize(("word", "meant"), [("bord", "board"), ("Tabel", "table"), ("survay", "survey"), ("zzz", "")])
def test_a_command_that_is_not_there(word, meant):
    """The commands are named, and the one that was meant where one is near."""
    done = CliRunner().invoke(main, [word], prog_name="conjcheck")
    assert done.exit_code == 2
    message = f"expected one of {', '.join(COMMANDS)}, got {word!r}" + (f"; did you mean {meant}?" if meant else "")
    assert done.stderr.rstrip().endswith(message)
