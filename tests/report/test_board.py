"""The board: every conjecture and every record has a row, whatever is wrong with it."""

import json

import pytest
from page_samples import CONJECTURES, TAGS, TURNED, Seen, document, hostile_record, outcomes

from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import RecordError
from conjcheck.evidence.source import rule_hash
from conjcheck.report.board import board_of_documents, board_of_folder, board_page, board_table, plugin_files, write_run
from conjcheck.report.pages import documents_of, write_pages

RULE = """
from conjcheck import Varieties, candidate


@candidate(on=Varieties("Gr(1,3)"))
def {name}(X, u, v):
    return {{}}
"""


def record(name, **given):
    """The text of a record."""
    plain = {"format": "conjcheck-record", "version": 1, "conjecture": name, "status": "open", "counterexamples": []}
    return json.dumps(plain | given)


@pytest.fixture
def folder(tmp_path):
    """Plug-ins and records, good and bad."""
    home = tmp_path / "conjectures"
    (home / "records").mkdir(parents=True)
    (home / "deep").mkdir()
    for name in ("plain", "covered", "stale", "refuted_one", "garbled"):
        (home / f"{name}.py").write_text(RULE.format(name=name))
    (home / "deep" / "inner.py").write_text(RULE.format(name="inner"))
    (home / "_helper.py").write_text("raise SystemExit")
    (home / "conftest.py").write_text("raise SystemExit")
    (home / "broken.py").write_text("import nothing_of_this_name")
    (home / "leaves.py").write_text("raise SystemExit(3)")
    (home / "chatty.py").write_text("print('noise')\n" + RULE.format(name="chatty"))
    row = {"rows": 9, "seen": 9, "of": 9, "cases": 9, "nonzero": 9, "failing": 0, "seconds": 1, "engine": "e", "conjcheck": "0"}
    coverage = [{"space": "Gr(1,3)", **row}]
    good = rule_hash(home / "covered.py")
    (home / "records" / "covered.json").write_text(record("covered", rule=good, coverage=coverage))
    (home / "records" / "stale.json").write_text(record("stale", rule="sha256:" + "0" * 64, coverage=coverage))
    found = [{"where": "Gr(1,3): (1) * (1) -> (2), q^(0)", "rule": 0, "oracle": 1, "minimal": False}]
    (home / "records" / "refuted_one.json").write_text(record("refuted_one", status="refuted", counterexamples=found))
    (home / "records" / "garbled.json").write_text("{{{" + TAGS)
    (home / "records" / "lonely.json").write_text(record("lonely"))
    (home / "records" / "wild.json").write_text(json.dumps(hostile_record()))
    return home


def rows_of(folder, beside):
    """The rows by name."""
    return {row["name"]: row for row in board_of_folder(folder, beside=beside)}


def test_nothing_is_lost(folder, tmp_path, capsys):
    """Every plug-in and every record is there with its status; helpers are not; what a plug-in prints stays out of the output."""
    rows = rows_of(folder, tmp_path)
    assert {name: row["status"] for name, row in rows.items()} == {
        "plain": "open",
        "covered": "open",
        "stale": "open",
        "refuted_one": "refuted",
        "garbled": "unreadable",
        "inner": "open",
        "broken": "broken",
        "leaves": "broken",
        "chatty": "open",
        "lonely": "open",
        "\u05e9\u05dc\u05d5\u05dd": "refuted",
    }
    assert "noise" not in capsys.readouterr().out
    assert "No module named 'nothing_of_this_name'" in rows["broken"]["scope"]
    assert "expected JSON" in rows["garbled"]["scope"]
    assert "a record without a conjecture" in rows["lonely"]["note"]
    assert str(tmp_path) not in json.dumps([rows["garbled"], rows["lonely"]])


def test_what_is_on_record(folder, tmp_path):
    """Scope, counterexample, date and staleness come from the record and the hash of the rule as it stands."""
    rows = rows_of(folder, tmp_path)
    assert rows["covered"]["scope"] == "all of Gr(1,3); 9 rows, 9 cases"
    assert rows["covered"]["stale"] == ""
    assert "computed for another version of the rule" in rows["stale"]["stale"]
    assert rows["refuted_one"]["counterexample"] == "Gr(1,3): (1) * (1) -> (2), q^(0)"
    assert rows["covered"]["date"].startswith("20")
    assert rows["plain"]["date"] == ""
    assert rows["plain"]["scope"] == "nothing on record"


def test_the_last_run_counts_for_its_rule_only(folder, tmp_path):
    """A page beside the board is linked, and its verdict counts while the rule is the one that was run."""
    (rule,) = conjectures_in_file(folder / "plain.py")
    run = [outcomes("agrees")[1] | {"conjecture": "plain", "file": rule.file, "rule_hash": rule_hash(rule.file)}]
    write_pages(tmp_path, documents_of(run, made="2031-05-06 07:08 UTC"))
    row = rows_of(folder, tmp_path)["plain"]
    assert (row["status"], row["link"], row["date"]) == ("agrees", "plain.html", "2031-05-06 07:08 UTC")
    assert row["scope"].startswith("all 2 spaces")
    (folder / "plain.py").write_text(RULE.format(name="plain") + "# changed")
    row = rows_of(folder, tmp_path)["plain"]
    assert (row["status"], row["stale"]) == ("open", "the page is about another version of the rule")
    (tmp_path / "plain.json").write_text("[]")
    assert rows_of(folder, tmp_path)["plain"]["status"] == "open"


def test_a_run_never_whitewashes_a_record(folder, tmp_path):
    """What is refuted on record stays refuted on the board, whatever a run said."""
    run = [outcomes("agrees")[1] | {"conjecture": "refuted_one", "file": str(folder / "refuted_one.py")}]
    write_pages(tmp_path, documents_of(run, made="2031-05-06 07:08 UTC"))
    assert rows_of(folder, tmp_path)["refuted_one"]["status"] == "refuted"


def test_plugin_files(folder):
    """Exactly the files that pytest would take for plug-ins."""
    assert [path.name for path in plugin_files(folder)] == [
        *("broken.py", "chatty.py", "covered.py", "inner.py", "garbled.py", "leaves.py", "plain.py", "refuted_one.py", "stale.py")
    ]


def test_the_bundled_conjectures(tmp_path):
    """All bundled conjectures are on the board, none of them broken, and those with a record of refutation are refuted."""
    rows = rows_of(CONJECTURES, tmp_path)
    assert not [row for row in rows.values() if row["status"] in ("broken", "unreadable")]
    refuted = {
        json.loads(path.read_text())["conjecture"]
        for path in (CONJECTURES / "records").glob("*.json")
        if '"refuted"' in path.read_text()
    }
    assert {name for name, row in rows.items() if row["status"] == "refuted"} == refuted


def test_the_page_holds_all_rows(folder, tmp_path):
    """The page has a row per row, escapes everything, has one script, and its policy allows just that one."""
    rows = board_of_folder(folder, beside=tmp_path)
    text = board_page(rows, TAGS)
    seen = Seen(text)
    assert [tag for tag, _ in seen.tags].count("tr") == 1 + len(rows)
    assert [tag for tag, _ in seen.tags].count("script") == 1
    assert TAGS in seen.text
    assert "img" not in {tag for tag, _ in seen.tags}
    policy = next(a["content"] for a in seen.named("meta") if a.get("http-equiv"))
    assert "script-src 'sha256-" in policy
    assert "unsafe" not in policy
    assert len([a for a in seen.named("th") if a.get("scope") == "col"]) == 6
    assert f"{len(rows)} conjectures: " in seen.text


def test_an_empty_board(tmp_path):
    """A folder without anything makes a board that says so."""
    text = Seen(board_page(board_of_folder(tmp_path, beside=tmp_path), "empty")).text
    assert "0 conjectures" in text
    assert "No conjecture and no record is here." in text


def test_markdown():
    """One line per row; what Markdown would take for a mark or for the end of a cell is none."""
    pages = [type("P", (), {"name": "a b.html"})(), type("P", (), {"name": "c.html"})()]
    rows = board_of_documents([document("lantern"), document("outcome")], pages)
    lines = board_table(rows, base="../p q/").splitlines()
    assert len(lines) == 4
    assert lines[2].startswith("| [`lantern_rule`](../p%20q/a%20b.html) | refuted | all 9 spaces")
    assert "`Gr(3,5): (2) * (2,1) -> (), q^(1)`" in lines[2]
    for line in lines:
        assert line.count("|") == 6
    assert "<script" not in lines[3]
    assert "&#60;script&#62;" in lines[3]
    assert TURNED not in lines[3]


def test_a_run_has_an_index(tmp_path):
    """The index of a run links the page of each conjecture, and names what could not be collected."""
    broken = [{"file": "/x/bad.py", "problem": "Traceback\nSyntaxError: <b>"}]
    write_run(tmp_path / "out", [*outcomes("agrees"), *outcomes("crashed")], broken)
    text = (tmp_path / "out" / "index.html").read_text(encoding="utf-8")
    seen = Seen(text)
    assert [a["href"] for a in seen.named("a")][1:] == ["page_samples.powers.html", "page_samples.falls.html"]
    for name in ("page_samples.powers", "page_samples.falls"):
        assert (tmp_path / "out" / f"{name}.html").is_file()
    assert "SyntaxError: <b>" in seen.text
    assert "the plug-in cannot be used" in seen.text


def test_the_newest_evidence_counts(folder, tmp_path):
    """Of a record and a page about the rule as it stands the newer one counts, and the row says which, in both outputs."""
    (rule,) = conjectures_in_file(folder / "covered.py")
    run = [outcomes("agrees")[1] | {"conjecture": "covered", "file": rule.file, "rule_hash": rule_hash(rule.file)}]
    for made, source, scope in (
        ("2001-01-01 00:00 UTC", "from its record", "all of Gr(1,3)"),
        ("2931-01-01 00:00 UTC", "from its last run", "all 2"),
    ):
        write_pages(tmp_path, documents_of(run, made=made))
        row = rows_of(folder, tmp_path)["covered"]
        assert row["source"] == source
        assert row["scope"].startswith(scope)
        assert f"({source})" in board_table([row])
        assert source in Seen(board_page([row], "t")).text


def test_a_counterexample_to_an_earlier_version(folder, tmp_path):
    """A rule that was refuted in an earlier version is not called refuted; the row says what was."""
    where, version = "Gr(1,3): (1) * (1) -> (2), q^(0)", "sha256:" + "1" * 64
    found = [{"where": where, "rule": 0, "oracle": 1, "minimal": True, "rule_hash": version}]
    for current in (rule_hash(folder / "plain.py"), version):
        (folder / "records" / "plain.json").write_text(record("plain", status="refuted", rule=current, counterexamples=found))
        row = rows_of(folder, tmp_path)["plain"]
        assert (row["status"], row["counterexample"]) == ("open", "")
        assert row["note"] == f"an earlier version of the rule was refuted at {where}"
        assert f"an earlier version of the rule was refuted at {where}" in board_table([row]).replace("&#42;", "*").replace(
            "&#62;", ">"
        )


def test_the_record_of_another_file(folder, tmp_path):
    """A record of a conjecture of the same name in another file is not taken for its own."""
    (folder / "records" / "plain.json").write_text(record("plain", file="other.py"))
    row = rows_of(folder, tmp_path)["plain"]
    assert row["status"] == "unreadable"
    assert "expected the record of plain in plain.py, got that of plain in other.py" in row["scope"]


def test_files_that_are_no_text(folder, tmp_path):
    """A plug-in that is not UTF-8, and one that names a file which cannot be read, have rows that say why; the others stay."""
    (folder / "latin.py").write_bytes(b"# caf\xe9\n" + RULE.format(name="latin").encode())
    (folder / "needy.py").write_text(RULE.format(name="needy") + "\nimport _blank\n")
    (folder / "_blank.py").write_bytes(b"# -*- coding: latin-1 -*-\n# caf\xe9\n")
    rows = rows_of(folder, tmp_path)
    for name in ("latin", "needy"):
        assert rows[name]["status"] == "broken"
        assert "expected a readable Python file in UTF-8" in rows[name]["scope"]
    assert rows["plain"]["status"] == "open"


def test_a_row_that_fails_late(folder, tmp_path, monkeypatch):
    """Whatever is wrong with the hash of a rule is told in its row."""

    def unreadable(file):
        raise RecordError(f"{file}: expected a readable file, since the rule names it, got none")

    monkeypatch.setattr("conjcheck.report.board.rule_hash", unreadable)
    row = rows_of(folder, tmp_path)["plain"]
    assert row["status"] == "broken"
    assert "since the rule names it" in row["scope"]
