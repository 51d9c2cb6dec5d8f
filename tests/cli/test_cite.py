"""The command ``conjcheck cite``: sentences on standard output, or a clear refusal."""

from pathlib import Path

from click.testing import CliRunner

from conjcheck.cli import main
from conjcheck.evidence.record import read_record_file
from conjcheck.report.cite import LATEX, PLAIN, bibtex, citation

RECORD = Path(__file__).parents[2] / "conjectures" / "records" / "lantern_rule.json"


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["cite", *map(str, words)], catch_exceptions=False, prog_name="conjcheck")


def test_forms():
    """Plain text is the default; LaTeX and BibTeX on request; BibTeX needs no record."""
    record = read_record_file(RECORD)
    for words, text in (
        ([RECORD], citation(record, PLAIN) + "\n"),
        ([RECORD, "--text"], citation(record, PLAIN) + "\n"),
        ([RECORD, "--latex"], citation(record, LATEX) + "\n"),
        ([RECORD, "--bibtex"], bibtex()),
        (["--bibtex"], bibtex()),
    ):
        done = run(*words)
        assert (done.exit_code, done.stdout, done.stderr) == (0, text, "")


def test_refusals(tmp_path):
    """No record, a file that is none, and a file that is not there end with status 2 and a message."""
    done = run()
    assert done.exit_code == 2
    assert "expected a RECORD such as conjectures/records/lantern_rule.json, got none" in done.stderr
    wrong = tmp_path / "wrong.json"
    wrong.write_text("[]")
    done = run(wrong)
    assert (done.exit_code, done.stdout) == (2, "")
    assert f"{wrong}: expected an object" in done.stderr
    assert run(tmp_path / "none.json").exit_code == 2
    plugin = tmp_path / "rule.py"
    plugin.write_text("def rule(): ...")
    done = run(plugin)
    assert done.exit_code == 2
    assert f"{plugin}: expected a record such as conjectures/records/NAME.json, got a file of another kind" in done.stderr
    assert "delete" not in done.stderr
    done = run(next(RECORD.parent.glob("*.certificate.json")))
    assert done.exit_code == 2
    assert "this is a certificate, not a record" in done.stderr
