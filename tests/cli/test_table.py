"""The command ``conjcheck table``: a table on standard output or in a file that is complete."""

import pytest
from click.testing import CliRunner

from conjcheck import FlagVariety
from conjcheck.cli import main
from conjcheck.report import table as room
from conjcheck.report.table import TableOptions, table_lines


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["table", *map(str, words)], catch_exceptions=False, prog_name="conjcheck")


@pytest.mark.parametrize(
    ("words", "options"),
    [
        ([], TableOptions()),
        (["--format", "json", "--notation", "string"], TableOptions("json", "string")),
        (["--format", "latex", "--half"], TableOptions("latex", half=True)),
        (["--order", "blocks"], TableOptions(order="blocks")),
    ],
)
def test_printed_and_written(tmp_path, words, options):
    """What is printed, and what is written, are the lines of the table with these options."""
    text = "".join(table_lines(FlagVariety("Fl(1,3;4)"), options))
    done = run("Fl(1,3;4)", *words)
    assert (done.exit_code, done.stdout, done.stderr) == (0, text, "")
    path = tmp_path / "table"
    done = run("Fl(1,3;4)", *words, "-o" if words else "--output", path)
    assert (done.exit_code, done.stdout) == (0, "")
    assert path.read_text(encoding="utf-8") == text
    assert list(tmp_path.iterdir()) == [path]


def test_refusals(tmp_path):
    """A space or a notation that there is not, a space out of reach, and a folder that is not there end with status 2."""
    for words, text in (
        (["Gr(5,3)"], "expected rising steps between 1 and 2"),
        (["Fl(3)", "--notation", "partition"], "expected notation to be one of 'permutation', 'string', 'word', 'index' on Fl(3)"),
        (["E8/B"], "expected a variety in reach of some engine"),
        (["Fl(3)", "--format", "xml"], "'xml' is not one of"),
        (["Fl(3)", "--output", tmp_path / "none" / "table.csv"], "expected a file that can be written"),
    ):
        done = run(*words)
        assert (done.exit_code, done.stdout) == (2, ""), words
        assert text in " ".join(done.stderr.split()), done.stderr


def test_an_incomplete_table_leaves_the_file_alone(tmp_path, monkeypatch):
    """If the engine fails on the way, the old file is still there, and no draft."""
    path = tmp_path / "table.csv"
    path.write_text("old")
    honest, asked = room.row_terms, []

    def failing(u, v):
        asked.append(u)
        if len(asked) > 5:
            raise MemoryError
        return honest(u, v)

    monkeypatch.setattr(room, "row_terms", failing)
    assert run("Fl(3)", "--output", path).exit_code == 2
    assert len(asked) == 6
    assert path.read_text() == "old"
    assert list(tmp_path.iterdir()) == [path]
