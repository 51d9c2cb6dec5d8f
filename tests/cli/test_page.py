"""``conjcheck page``: from records, saved outcomes and plug-ins to pages, and to LaTeX."""

import json
from pathlib import Path

import pytest
from click.testing import CliRunner

from conjcheck import examine
from conjcheck.cli import main
from conjcheck.conjecture.discover import conjectures_in_file

CONJECTURES = Path(__file__).parents[2] / "conjectures"

FALSE = """
from conjcheck import Varieties, candidate


@candidate(on=Varieties("Gr(1,3)"), statement="N = 0")
def nothing(X, u, v, w, d):
    return 0
"""


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["page", *map(str, words)], catch_exceptions=False, prog_name="conjcheck")


@pytest.fixture
def rule(tmp_path):
    """A false rule in a file."""
    path = tmp_path / "nothing.py"
    path.write_text(FALSE)
    return path


def test_from_a_record(tmp_path):
    """Every bundled record makes a page, named on the output, with its counterexample; the status is 0."""
    found = sorted((CONJECTURES / "records").glob("*.json"))
    records = [path for path in found if not path.name.endswith(".certificate.json")]
    result = run(*found, "-o", tmp_path)
    assert result.exit_code == 0
    assert (found != records) == ("certificates have no page of their own" in result.stderr)
    pages = [Path(line) for line in result.stdout.splitlines()]
    assert [page.stem for page in pages] == [record.stem for record in records]
    for page, record in zip(pages, records, strict=True):
        data = json.loads(record.read_text(encoding="utf-8"))
        text = page.read_text(encoding="utf-8")
        word = "refuted" if data["status"] == "refuted" else "open"
        assert f'<p class="word"><bdi>{word}</bdi>' in text
        assert "from the record alone" in text


def test_from_a_plugin(rule, tmp_path):
    """A plug-in is examined now."""
    result = run(rule, "-o", tmp_path / "out", "--seed", "1")
    assert result.exit_code == 0
    text = Path(result.stdout.strip()).read_text(encoding="utf-8")
    assert "Gr(1,3): () * () -&gt; (), q^(0)" in text
    assert "by the rule" in text


def test_saved_outcomes_make_the_same_page(rule, tmp_path):
    """Outcomes saved as JSON make the page that the examination makes, but for the time."""
    (conjecture,) = conjectures_in_file(rule)
    saved = tmp_path / "saved.json"
    parts = [outcome.as_json() for outcome in examine(conjecture, effort="quick", seed=1)]
    saved.write_text(json.dumps(parts))
    one, other = run(saved, "-o", tmp_path / "a"), run(f"{rule}::nothing", "-o", tmp_path / "b", "--seed", "1")
    assert (one.exit_code, other.exit_code) == (0, 0)
    first, second = (json.loads((tmp_path / side / "nothing.json").read_text()) for side in "ab")
    for document in (first, second):
        document["made"] = document["file"] = document["rule"] = ""
        for part in document["parts"]:
            part["seconds"] = 0
    assert first == second
    saved.write_text(json.dumps(parts[0]))
    assert run(saved, "-o", tmp_path / "c").exit_code == 0


def test_latex(rule, tmp_path, monkeypatch):
    """--latex prints the counterexample and writes nothing."""
    monkeypatch.chdir(tmp_path)
    result = run(rule, "--latex", "--seed", "1")
    assert result.exit_code == 0
    assert r"On $\mathrm{Gr}(1,3)$ let $u = ()$, $v = ()$ and $w = ()$." in result.stdout
    assert [path.name for path in tmp_path.iterdir() if path.suffix != ".pyc" and path.name != "__pycache__"] == ["nothing.py"]


def test_no_counterexample_to_print(tmp_path):
    """--latex without a counterexample is an error that says what to do."""
    empty = tmp_path / "x.json"
    empty.write_text(
        json.dumps({"format": "conjcheck-record", "version": 1, "conjecture": "x", "status": "open", "counterexamples": []})
    )
    result = run(empty, "--latex")
    assert result.exit_code == 2
    assert "expected a counterexample to print, got none; leave out --latex" in result.stderr


@pytest.mark.parametrize("text", ["{{{", "[]", "{}", "7", '{"format": "conjcheck-record", "version": 99}', "\ufffe<script>"])
def test_what_is_no_record_has_a_page_that_says_so(tmp_path, text):
    """A file that is neither a record nor outcomes has a page with what is wrong and what is there; the status is 1."""
    bad = tmp_path / "bad.json"
    bad.write_text(text, encoding="utf-8")
    result = run(bad, "-o", tmp_path)
    assert result.exit_code == 1
    page = (tmp_path / "bad.html").read_text(encoding="utf-8")
    assert "the record cannot be read" in page
    assert "<script" not in page


@pytest.mark.parametrize("target", ["nowhere.json", "nowhere.py"])
def test_no_such_file(target, tmp_path):
    """A file that is not there is an error, and no page is made."""
    result = run(tmp_path / target, "-o", tmp_path / "out")
    assert result.exit_code == 2
    assert target in result.stderr
    assert not (tmp_path / "out").exists()


def test_a_folder_that_cannot_be_written(rule, tmp_path):
    """Where pages cannot go, the message names the folder."""
    (tmp_path / "file").write_text("")
    result = run(rule, "-o", tmp_path / "file" / "below", "--seed", "1")
    assert result.exit_code == 2
    assert "choose another with -o" in result.stderr


def test_files_of_other_kinds(tmp_path):
    """A text that is no JSON, and certificates alone, are errors of usage that name what is expected."""
    (tmp_path / "notes.md").write_text("# notes")
    for target in (tmp_path / "notes.md", next((CONJECTURES / "records").glob("*.certificate.json"))):
        result = run(target, "-o", tmp_path / "pages")
        assert result.exit_code == 2
        assert "expected a record such as conjectures/records/NAME.json, saved outcomes (JSON) or a plug-in (.py)" in result.stderr
    assert not (tmp_path / "pages").exists()
