"""The command ``conjcheck unite``: records add up, by hand and as a merge driver of git."""

import shutil
import subprocess
import sys
from dataclasses import replace

import pytest
from click.testing import CliRunner

from conjcheck import Case, FlagVariety
from conjcheck.cli import main
from conjcheck.evidence.record import Counterexample, Covered, Record, merge, read_record_file, record_text

HASH = "sha256:" + "0" * 64
FIRST = Covered(FlagVariety("Gr(1,3)"), 9, 9, 12, 10, seconds=0.5, engine="recursion", conjcheck="0.1.0")
SECOND = Covered(FlagVariety("Fl(3)"), 36, 36, 60, 45, seconds=0.5, engine="recursion", conjcheck="0.1.0")
FOUND = Counterexample(Case.parse("Gr(2,4): (1) * (2,1) -> (), q^(1)"), 0, 1, minimal=False)
OURS = Record("r", "open", rule=HASH, coverage=(FIRST,))
THEIRS = Record("r", "refuted", (FOUND,), rule=HASH, coverage=(SECOND,))


def run(*words):
    """The command in this process."""
    return CliRunner().invoke(main, ["unite", *map(str, words)], catch_exceptions=False, prog_name="conjcheck")


@pytest.fixture
def files(tmp_path):
    """Two records in files."""
    paths = tmp_path / "ours.json", tmp_path / "theirs.json"
    for path, record in zip(paths, (OURS, THEIRS), strict=True):
        path.write_text(record_text(record), encoding="utf-8")
    return paths


def test_printed(files):
    """Without --output the united record is printed, the same in either order; the files stay as they are."""
    texts = [path.read_text() for path in files]
    for words in (files, files[::-1], (*files, files[0])):
        done = run(*words)
        assert (done.exit_code, done.stderr) == (0, "")
        assert done.stdout == record_text(merge(OURS, THEIRS))
    assert [path.read_text() for path in files] == texts


def test_written(files, tmp_path):
    """With --output the record is written: to a new file, or over one of the records, but over nothing else."""
    new = tmp_path / "new.json"
    assert run(*files, "-o", new).exit_code == 0
    assert read_record_file(new) == merge(OURS, THEIRS)
    done = run(*files, "-o", new)
    assert done.exit_code == 2
    assert "which exists; name it among the records" in done.stderr
    assert run(*files, "--output", files[0]).exit_code == 0
    assert read_record_file(files[0]) == merge(OURS, THEIRS)
    assert read_record_file(files[1]) == THEIRS


def test_contradictions(files):
    """Records that contradict each other end with status 1, name the entry, and change nothing."""
    files[1].write_text(record_text(replace(OURS, coverage=(replace(FIRST, cases=13),))))
    done = run(*files, "-o", files[0])
    assert (done.exit_code, done.stdout) == (1, "")
    assert "one coverage of Gr(1,3), got two that contradict each other: cases 12 and 13" in done.stderr
    assert read_record_file(files[0]) == OURS


def test_refusals(files, tmp_path):
    """One record, or a file that is none, ends with status 2."""
    assert run(files[0]).exit_code == 2
    assert "expected two records or more, got 1" in run(files[0]).stderr
    files[1].write_text("<<<<<<< ours")
    done = run(*files)
    assert done.exit_code == 2
    assert f"{files[1]}: expected JSON" in done.stderr
    assert run(files[0], tmp_path / "none.json").exit_code == 2
    plugin = tmp_path / "rule.py"
    plugin.write_text("def rule(): ...")
    assert "rule.py: expected a record such as conjectures/records/NAME.json" in run(files[0], plugin).stderr


@pytest.mark.skipif(shutil.which("git") is None, reason="git is not installed")
def test_as_a_merge_driver(tmp_path):
    """Set up as the help says, git unites two branches without a conflict, and leaves a contradiction as one."""

    def git(*words, ok=True):
        who = ["-c", "user.name=n", "-c", "user.email=e@example.org"]
        done = subprocess.run(["git", *who, *words], cwd=tmp_path, capture_output=True, text=True, check=False)
        assert (done.returncode == 0) is ok, done.stdout + done.stderr
        return done

    help_text = run("--help").stdout
    assert '"conjcheck unite %A %B -o %A"' in help_text
    driver = f'"{sys.executable}" -m conjcheck unite %A %B -o %A'
    folder = tmp_path / "conjectures" / "records"
    folder.mkdir(parents=True)
    path = folder / "r.json"
    git("init", "-q", "-b", "main")
    git("config", "merge.conjcheck-record.driver", driver)
    lines = [line.split("#")[0].strip() for line in help_text.splitlines() if line.strip().startswith("conjectures/records/")]
    assert len(lines) == 2
    (tmp_path / ".gitattributes").write_text("\n".join(lines) + "\n")

    def commit(record):
        path.write_text(record_text(record), encoding="utf-8")
        git("add", ".")
        git("commit", "-q", "-m", "record")

    commit(Record("r", "open", rule=HASH))
    git("checkout", "-q", "-b", "other")
    commit(THEIRS)
    git("checkout", "-q", "main")
    commit(OURS)
    git("merge", "-q", "other", "-m", "merge")
    assert read_record_file(path) == merge(OURS, THEIRS)

    git("checkout", "-q", "other")
    commit(replace(THEIRS, coverage=(SECOND, replace(FIRST, cases=13))))
    git("checkout", "-q", "main")
    git("merge", "-q", "other", ok=False)
    assert "UU conjectures/records/r.json" in git("status", "--porcelain").stdout
