"""``--conjcheck-report``: a page per conjecture at the end of a run, also when several processes ran it."""

import json
import re

import pytest
from sources import FAULT, PROJECTIVE, WRONG

pytest_plugins = ["pytester"]

LOSES_THE_FOLDER = """
import shutil


def pytest_runtest_teardown(item):
    shutil.rmtree("pages", ignore_errors=True)
    open("pages", "a").close()
"""


@pytest.fixture
def mixed(project):
    """A true rule, a false one, and a file that cannot be imported."""
    project.write("conjectures/good.py", PROJECTIVE.format(name="good"))
    project.write("conjectures/wrong.py", WRONG.format(name="wrong"))
    project.write("conjectures/broken.py", "import nothing_of_this_name")
    return project


@pytest.mark.parametrize("more", [(), ("-n", "2")])
def test_pages_of_a_run(mixed, more):
    """Each conjecture has one page of all its parts, with a replay line; the index links them and names the broken file."""
    result = mixed.run(
        "-q", "--tb=no", "-k", "survey or laws or import", "--conjcheck-effort", "quick", "--conjcheck-report", "out/pages", *more
    )
    folder = mixed.path / "out" / "pages"
    assert sorted(path.name for path in folder.iterdir()) == ["good.html", "good.json", "index.html", "wrong.html", "wrong.json"]
    assert "pages: out/pages/index.html" in result.text
    index = (folder / "index.html").read_text(encoding="utf-8")
    assert re.findall(r'<a href="(\w+\.html)">', index) in (["good.html", "wrong.html"], ["wrong.html", "good.html"])
    assert "No module named &#39;nothing_of_this_name&#39;" in index
    good, wrong = (json.loads((folder / f"{name}.json").read_text()) for name in ("good", "wrong"))
    assert {part["part"] for part in good["parts"]} >= {"laws", "survey"}
    assert (good["status"], wrong["status"]) == ("agrees", "refuted")
    assert wrong["failure"]["where"] == FAULT
    assert wrong["replay"].endswith(f"--conjcheck-case '{FAULT}'")
    assert FAULT.replace(">", "&gt;") in (folder / "wrong.html").read_text(encoding="utf-8")


def test_nothing_is_written_unasked(mixed):
    """Without the option no page is made; with it, a run without conjectures makes none either."""
    mixed.run("-q", "-k", "survey", "conjectures/good.py")
    assert not list(mixed.path.rglob("*.html"))
    mixed.write("test_plain.py", "def test_x():\n    pass\n")
    assert mixed.run("-q", "test_plain.py", "--conjcheck-report", "pages").ret == 0
    assert not list(mixed.path.rglob("*.html"))


def test_a_place_that_cannot_be_written(mixed):
    """A folder that cannot be made is an error of usage before anything runs."""
    mixed.write("taken", "")
    result = mixed.run("-q", "--conjcheck-report", "taken")
    assert result.ret == pytest.ExitCode.USAGE_ERROR
    assert "expected a folder that can be written for --conjcheck-report, got 'taken'" in result.stderr.str()


def test_pages_that_fail_to_be_written_fail_the_run(mixed):
    """If the folder is lost during the run, the run says so and does not end well."""
    mixed.write("conftest.py", LOSES_THE_FOLDER)
    result = mixed.run("-q", "-k", "survey", "conjectures/good.py", "--conjcheck-report", "pages")
    assert "the pages could not be written" in result.text
    assert result.ret != 0
