"""``conjcheck board``: the page, the table in Markdown, and links that lead there."""

import json
from pathlib import Path

import pytest
from click.testing import CliRunner

from conjcheck.cli import main

RULE = """
from conjcheck import Varieties, candidate


@candidate(on=Varieties("Gr(1,3)"))
def plain(X, u, v):
    return {}
"""


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["board", *map(str, words)], catch_exceptions=False, prog_name="conjcheck")


@pytest.fixture
def home(tmp_path, monkeypatch):
    """A repository with one conjecture and a page of it."""
    (tmp_path / "conjectures").mkdir()
    (tmp_path / "conjectures" / "plain.py").write_text(RULE)
    (tmp_path / "out").mkdir()
    (tmp_path / "out" / "plain.html").write_text("<!doctype html>")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_the_page(home):
    """Without options the page is board.html; its name is printed."""
    result = run("conjectures")
    assert (result.exit_code, result.stdout) == (0, "board.html\n")
    text = (home / "board.html").read_text(encoding="utf-8")
    assert "<bdi>plain</bdi>" in text
    assert "<h1><bdi>conjectures</bdi></h1>" in text
    assert 'href="plain.html"' not in text


def test_pages_beside_are_linked(home):
    """Names link to pages that lie beside the board."""
    assert run("conjectures", "-o", "out/board.html").exit_code == 0
    assert 'href="plain.html"' in (home / "out" / "board.html").read_text(encoding="utf-8")


def test_markdown_alone(home):
    """--markdown - prints the table and writes nothing."""
    result = run("conjectures", "--markdown", "-")
    assert result.exit_code == 0
    assert result.stdout.splitlines()[2] == "| `plain` | open | nothing on record |  |  |"
    assert not (home / "board.html").exists()


def test_both(home):
    """With -o both are written; links in the table go from its own folder to the pages."""
    result = run("conjectures", "-o", "out/board.html", "--markdown", "docs/table.md")
    assert result.exit_code == 0
    assert result.stdout.splitlines() == ["out/board.html", str(Path("docs/table.md"))]
    assert "[`plain`](../out/plain.html)" in (home / "docs" / "table.md").read_text(encoding="utf-8")
    printed = run("conjectures", "-o", "out/board.html", "--markdown", "-")
    assert printed.stdout.startswith("| conjecture |")
    assert "[`plain`](out/plain.html)" in printed.stdout
    assert printed.stderr == "out/board.html\n"


def test_all_outputs_say_the_same(home):
    """Without -o, pages are looked for in the folder pages, by the page and by the table alike."""
    (home / "out").rename(home / "pages")
    assert run("conjectures").exit_code == 0
    assert 'href="pages/plain.html"' in (home / "board.html").read_text(encoding="utf-8")
    assert "[`plain`](pages/plain.html)" in run("conjectures", "--markdown", "-").stdout
    assert run("conjectures", "-o", "pages/board.html").exit_code == 0
    assert 'href="plain.html"' in (home / "pages" / "board.html").read_text(encoding="utf-8")


def test_what_is_broken_is_shown_and_counted(home):
    """A broken plug-in is on the board, and the status is 1."""
    (home / "conjectures" / "bad.py").write_text("def")
    result = run("conjectures")
    assert result.exit_code == 1
    assert "the plug-in cannot be used" in (home / "board.html").read_text(encoding="utf-8")


def test_wrong_usage(home):
    """A folder that is not there, and a place that cannot be written, are errors of usage."""
    assert run("nowhere").exit_code == 2
    result = run("conjectures", "-o", "out/plain.html/board.html")
    assert result.exit_code == 2
    assert "expected a file that can be written" in result.stderr


def test_json(home):
    """The rows as one document, and no page unless it is asked for; two things cannot be printed at once."""
    result = run("conjectures", "--json")
    assert (result.exit_code, result.stderr) == (0, "")
    keys = ("name", "file", "status", "scope", "counterexample", "date", "stale", "source", "note")
    assert json.loads(result.stdout) == [
        dict.fromkeys(keys, "") | {"name": "plain", "file": "plain.py", "status": "open", "scope": "nothing on record"}
    ]
    assert not (home / "board.html").exists()
    result = run("conjectures", "--json", "-o", "out/board.html", "--markdown", "board.md")
    assert len(json.loads(result.stdout)) == 1
    assert result.stderr.splitlines() == [str(Path("out/board.html")), "board.md"]
    assert run("conjectures", "--json", "--markdown", "-").exit_code == 2
