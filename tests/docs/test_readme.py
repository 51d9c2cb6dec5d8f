"""Everything the README shows is run: its Python blocks, its commands, and their output."""

import doctest
import re
import shlex
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
TEXT = (ROOT / "README.md").read_text(encoding="utf-8")
PLUGINS = [block for block in re.findall(r"```python\n(.*?)```", TEXT, re.DOTALL) if ">>>" not in block]
SESSIONS = [block for block in re.findall(r"```python\n(.*?)```", TEXT, re.DOTALL) if ">>>" in block]
COMMANDS = [block for block in re.findall(r"```console\n(.*?)```", TEXT, re.DOTALL) if not block.startswith("$ pip")]


@pytest.fixture
def shared(tmp_path):
    """A repository like the one the README speaks of: the bundled conjectures and its own examples."""
    shutil.copytree(ROOT / "conjectures", tmp_path / "conjectures", ignore=shutil.ignore_patterns("__pycache__"))
    for name, block in zip(("hyperplane_powers", "divisors"), PLUGINS, strict=True):
        (tmp_path / "conjectures" / f"{name}.py").write_text(block, encoding="utf-8")
    return tmp_path


def run(folder, command):
    """Run a command line of the README there."""
    words = shlex.split(command)
    assert words[0] in ("pytest", "conjcheck")
    done = subprocess.run([sys.executable, "-m", *words], cwd=folder, capture_output=True, text=True, check=False)
    return done.returncode, done.stdout


def matches(shown, printed):
    """Whether the printed output is the shown one, where ... stands for anything and white space is folded."""
    return doctest.OutputChecker().check_output(shown, printed, doctest.ELLIPSIS | doctest.NORMALIZE_WHITESPACE)


def test_there_is_something_of_each_kind():
    """The README has plug-ins, a Python session and commands with output."""
    assert (len(PLUGINS), len(SESSIONS), len(COMMANDS)) == (2, 1, 8)


@pytest.mark.parametrize("block", COMMANDS)
def test_commands_print_what_is_shown(shared, block):
    """A command of the README ends well and prints what the README shows."""
    first, shown = block.split("\n", 1)
    status, printed = run(shared, first.removeprefix("$ "))
    assert status == 0, printed
    assert matches(shown, printed), printed


def test_the_comparison_of_outputs_can_fail():
    """A wrong number in a shown output is noticed."""
    assert matches("all ... agree: 3", "all 17 rows agree: 3\n")
    assert not matches("all ... agree: 3", "all 17 rows agree: 4\n")


def test_the_second_example_agrees(shared):
    """The README's claim holds as far as a quick survey reaches."""
    status, printed = run(shared, "pytest conjectures/divisors.py --conjcheck-effort quick")
    assert status == 0, printed
    assert re.search(r"divisors_multiply_without_multiplicity\s+agrees", printed)


def test_the_session_runs():
    """The Python session of the README gives what it shows."""
    test = doctest.DocTestParser().get_doctest(SESSIONS[0], {}, "README", "README.md", 0)
    result = doctest.DocTestRunner().run(test)
    assert result.attempted > 5
    assert result.failed == 0


def test_options_and_statuses_exist():
    """Every option and status that the README names is one of the program, and no status is left out."""
    plugin = (ROOT / "conjcheck" / "pytest_plugin.py").read_text(encoding="utf-8")
    for option in set(re.findall(r"--conjcheck-[a-z-]+", TEXT)):
        assert f'"{option}"' in plugin, option
    for key in set(re.findall(r"`(conjcheck_[a-z_]+)`", TEXT)):
        assert f'"{key}"' in plugin, key
    from conjcheck.testing.finding import STATUSES

    table = re.search(r"### Statuses(.*?)## ", TEXT, re.DOTALL)[1]
    assert tuple(re.findall(r"^\| `([a-z-]+)` \|", table, re.MULTILINE)) == STATUSES


def test_files_that_are_named_exist():
    """Every file the README points at is there."""
    for name in ("CITATION.cff", "DEVELOPERS.md", "LICENSE", "conjectures/lantern_rule.py"):
        assert name in TEXT
        assert (ROOT / name).is_file()
