"""The ledger: finished work that survives, and is believed only as it was written."""

import json
import signal
import sqlite3
import subprocess
import sys
import time
from dataclasses import replace

import pytest

from conjcheck.errors import LedgerError
from conjcheck.evidence import ledger as room
from conjcheck.evidence.ledger import ChunkKey, Ledger, library_mark

KEY = ChunkKey("sha256:" + "0" * 64, "made_up", "1+abc", "Gr(2,4)", "rows", 0, 36)


def put_many(path, count=40):
    """A ledger with some lines of some length."""
    with Ledger(path) as ledger:
        for k in range(count):
            ledger.put(replace(KEY, first=k, last=k + 1), {"seen": 1, "words": "lantern " * 40, "k": k})


def refused(path, words):
    """It is refused in these words, and not one byte is another one; no file is left beside it."""
    before, beside = path.read_bytes(), sorted(path.parent.iterdir())
    with pytest.raises(LedgerError, match=words) as caught:
        Ledger(path)
    assert str(path) in str(caught.value)
    assert path.read_bytes() == before
    assert sorted(path.parent.iterdir()) == beside


def test_what_was_put_is_got(tmp_path):
    """A result is got by its key, also after closing and opening; another key gives nothing."""
    path = tmp_path / "deep" / "er" / "kept.sqlite"
    result = {"seen": 36, "findings": [{"where": "Gr(2,4): () * ()", "n": 2**62}], "seconds": 0.25, "ended": False}
    with Ledger(path) as ledger:
        assert ledger.get(KEY) is None
        ledger.put(KEY, result)
        assert ledger.get(KEY) == result
    with Ledger(path) as ledger:
        assert ledger.get(KEY) == result
        ledger.put(KEY, {"seen": 1})
        assert ledger.get(KEY) == {"seen": 1}


OTHERS = {
    "rule": "sha256:" + "1" * 64,
    "conjecture": "made_up_too",
    "library": "1+abd",
    "space": "Gr(2,5)",
    "part": "rows, every failure",
    "first": 1,
    "last": 35,
}


@pytest.mark.parametrize("name", OTHERS)
def test_nothing_is_inherited(tmp_path, name):
    """A result counts for its own rule, conjecture, library, space, settings and rows alone."""
    with Ledger(tmp_path / "kept.sqlite") as ledger:
        ledger.put(KEY, {"seen": 1})
        assert ledger.get(replace(KEY, **{name: OTHERS[name]})) is None


def test_what_counts_no_more(tmp_path):
    """Work for another rule or library is told, per space, and which of the two it is; that of other conjectures is not."""
    with Ledger(tmp_path / "kept.sqlite") as ledger:
        ledger.put(KEY, {})
        ledger.put(replace(KEY, rule="sha256:old", first=0, last=10), {})
        ledger.put(replace(KEY, rule="sha256:old", first=10, last=12), {})
        ledger.put(replace(KEY, rule="sha256:older", space="Gr(1,2)", last=4), {})
        ledger.put(replace(KEY, library="0+abc", space="Gr(1,3)", last=9), {})
        ledger.put(replace(KEY, conjecture="another", rule="sha256:old"), {})
        assert ledger.stale("made_up", KEY.rule, KEY.library) == [
            ("Gr(1,2)", 4, True),
            ("Gr(1,3)", 9, False),
            ("Gr(2,4)", 12, True),
        ]
        assert ledger.stale("nobody", KEY.rule, KEY.library) == []


def test_the_library(monkeypatch, tmp_path):
    """The mark of the library is its version and a hash of its source: one character counts, but in commands and reports."""
    package = tmp_path / "conjcheck"
    for name in ("evidence/ledger.py", "oracle/engine.py", "report/text.py", "cli/survey.py"):
        (package / name).parent.mkdir(parents=True)
        (package / name).write_text("x = 1\n")
    marks = []
    monkeypatch.setattr(room, "__file__", str(package / "evidence" / "ledger.py"))
    for text in ("x = 1\n", "x = 2\n", "x = 1\n"):
        (package / "oracle/engine.py").write_text(text)
        marks.append(library_mark.__wrapped__())
    assert marks[0] == marks[2] != marks[1]
    for name in ("report/text.py", "cli/survey.py"):
        (package / name).write_text("x = 2\n")
    assert library_mark.__wrapped__() == marks[0]
    assert library_mark() == library_mark()


def test_an_empty_file(tmp_path):
    """An empty file is taken as a new ledger, as temporary files are made."""
    path = tmp_path / "kept.sqlite"
    path.touch()
    with Ledger(path) as ledger:
        ledger.put(KEY, {"seen": 1})
    assert path.read_bytes()[:15] == b"SQLite format 3"


@pytest.mark.parametrize(
    "text", [b"x", b"lantern\n" * 500, b"SQLite format 3\x00", b"SQLite format 3\x00" + b"\0" * 4080, b"\0" * 4096]
)
def test_not_sqlite(tmp_path, text):
    """Text, zeros, or a head without a body is refused and left alone."""
    path = tmp_path / "kept.sqlite"
    path.write_bytes(text)
    refused(path, "expected a ledger of conjcheck, got another file; nothing was changed")


FOREIGN = {
    "other tables": ["CREATE TABLE birds (name TEXT)", "INSERT INTO birds VALUES ('heron')"],
    "no tables": ["VACUUM"],
    "a table of the same name": [room._TABLE],
    "an application of its own": ["PRAGMA application_id = 7", room._TABLE],
    "a version of its own": ["PRAGMA user_version = 1", room._TABLE],
}


@pytest.mark.parametrize("kind", FOREIGN)
def test_other_databases(tmp_path, kind):
    """A SQLite database of another program, an empty one too, is refused and left alone."""
    path = tmp_path / "kept.sqlite"
    base = sqlite3.connect(path)
    for line in FOREIGN[kind]:
        base.execute(line)
    base.commit()
    base.close()
    refused(path, "expected a ledger of conjcheck, got another file; nothing was changed")


def test_a_database_in_the_middle_of_something(tmp_path):
    """A foreign database with a journal that waits to be rolled back is not opened at all: journal and file stay as they are."""
    path = tmp_path / "kept.sqlite"
    code = (
        "import os, sqlite3, sys\nb = sqlite3.connect(sys.argv[1], isolation_level=None)\nb.execute('CREATE TABLE birds (n)')\n"
        "b.execute('PRAGMA cache_size = 1')\nb.execute('BEGIN')\n"
        "[b.execute('INSERT INTO birds VALUES (?)', ('heron' * 900,)) for _ in range(300)]\nos._exit(0)\n"
    )
    subprocess.run([sys.executable, "-c", code, path], check=True)
    journal = tmp_path / "kept.sqlite-journal"
    before = journal.read_bytes()
    assert before
    refused(path, "expected a ledger of conjcheck, got another file; nothing was changed")
    assert journal.read_bytes() == before


def test_a_later_version(tmp_path):
    """A ledger of a later version is refused and left alone."""
    path = tmp_path / "kept.sqlite"
    put_many(path)
    base = sqlite3.connect(path)
    base.execute("PRAGMA user_version = 2")
    base.close()
    refused(path, "expected a ledger of version 1, got version 2; use the conjcheck that wrote it")


@pytest.mark.parametrize("share", [0.3, 0.6, 0.95])
def test_cut_off(tmp_path, share):
    """A ledger that was cut off is refused and left alone."""
    path = tmp_path / "kept.sqlite"
    put_many(path)
    data = path.read_bytes()
    path.write_bytes(data[: int(len(data) * share)])
    refused(path, "damaged|malformed")


def test_pages_overwritten(tmp_path):
    """A ledger whose inner pages are garbage is refused and left alone."""
    path = tmp_path / "kept.sqlite"
    put_many(path)
    data = bytearray(path.read_bytes())
    assert len(data) > 4 * 4096
    data[4096:] = b"\xa5" * (len(data) - 4096)
    path.write_bytes(data)
    refused(path, "damaged|malformed")


def test_single_bits(tmp_path):
    """Wherever one byte flips, a line is either what was written, or missing, or refused: never another result."""
    path = tmp_path / "kept.sqlite"
    put_many(path, 12)
    data, wrong, noticed = path.read_bytes(), [], 0
    for place in range(0, len(data), 37):
        flipped = bytearray(data)
        flipped[place] ^= 1
        path.write_bytes(flipped)
        try:
            with Ledger(path) as ledger:
                for k in range(12):
                    found = ledger.get(replace(KEY, first=k, last=k + 1))
                    if found not in (None, {"seen": 1, "words": "lantern " * 40, "k": k}):
                        wrong.append((place, k))
        except LedgerError:
            noticed += 1
    assert wrong == []
    assert noticed > 50


@pytest.mark.parametrize(
    "text", ["", "{", "[]", "7", "null", '"seen"', "NaN", "[" * 100_000, b"\xff", '{"seen": 2}', '{"seen": 1} ']
)
def test_a_line_that_was_changed(tmp_path, text):
    """A result that is no longer what was written, JSON or not, is refused by its rows."""
    path = tmp_path / "kept.sqlite"
    with Ledger(path) as ledger:
        ledger.put(KEY, {"seen": 1})
    base = sqlite3.connect(path)
    try:
        base.execute("UPDATE chunks SET result = ?", (text,))
        base.commit()
    finally:
        base.close()
    with Ledger(path) as ledger, pytest.raises(LedgerError, match=r"damaged: expected the result of rows 0 to 36 of Gr\(2,4\)"):
        ledger.get(KEY)


def test_a_line_in_the_place_of_another(tmp_path):
    """A good result under a wrong key is refused: a line belongs to its rows."""
    path = tmp_path / "kept.sqlite"
    with Ledger(path) as ledger:
        ledger.put(KEY, {"seen": 1})
    base = sqlite3.connect(path)
    base.execute("UPDATE chunks SET space = 'Gr(2,6)'")
    base.commit()
    base.close()
    with Ledger(path) as ledger, pytest.raises(LedgerError, match="damaged"):
        ledger.get(replace(KEY, space="Gr(2,6)"))


def test_a_folder(tmp_path):
    """A folder in its place is refused."""
    with pytest.raises(LedgerError, match="expected a readable file"):
        Ledger(tmp_path)


def test_no_folder(tmp_path):
    """Where no folder can be made there is a clear message."""
    (tmp_path / "file").touch()
    with pytest.raises(LedgerError, match=r"kept.sqlite: expected a file that can be written, got .*choose another with --ledger"):
        Ledger(tmp_path / "file" / "kept.sqlite")


def test_a_file_that_cannot_be_written(tmp_path):
    """A ledger that can be read only is refused at once, not after the first chunk; it is left alone."""
    path = tmp_path / "kept.sqlite"
    put_many(path, 3)
    path.chmod(0o444)
    tmp_path.chmod(0o555)
    before = path.read_bytes()
    code = (
        "import os, sys\nfrom pathlib import Path\n"
        "from conjcheck.evidence.ledger import Ledger\nfrom conjcheck.errors import LedgerError\n"
        "fd = os.open(os.path.dirname(sys.argv[1]), os.O_RDONLY)\nos.fchdir(fd)\nos.getuid() or os.seteuid(65534)\n"
        "try:\n    Ledger(Path('kept.sqlite'))\nexcept LedgerError as error:\n    print(error)\n"
    )
    try:
        done = subprocess.run([sys.executable, "-c", code, path], capture_output=True, text=True, check=True)
    finally:
        tmp_path.chmod(0o755)
    assert "kept.sqlite: " in done.stdout
    assert "choose another with --ledger" in done.stdout
    assert path.read_bytes() == before


WRITER = """
import sys
from dataclasses import replace
from pathlib import Path
from conjcheck.evidence.ledger import ChunkKey, Ledger
key = ChunkKey("r", "c", "l", "s", sys.argv[2], 0, 1)
with Ledger(Path(sys.argv[1])) as ledger:
    for k in range(int(sys.argv[3])):
        ledger.put(replace(key, first=k, last=k + 1), {"k": k, "who": sys.argv[2], "words": "lantern " * 60})
        print(k, flush=True)
"""


def writer(path, who, count):
    """A process that puts lines, and says so after each."""
    return subprocess.Popen([sys.executable, "-c", WRITER, path, who, str(count)], stdout=subprocess.PIPE, text=True)


def kept(path, who, k):
    """What is kept of line k of a writer."""
    with Ledger(path) as ledger:
        return ledger.get(ChunkKey("r", "c", "l", "s", who, k, k + 1))


def test_two_writers(tmp_path):
    """Two processes that make and fill one ledger at once lose nothing."""
    path = tmp_path / "kept.sqlite"
    writers = [writer(path, who, 120) for who in ("one", "two")]
    for process in writers:
        process.communicate(timeout=60)
        assert process.returncode == 0
    for who in ("one", "two"):
        with Ledger(path) as ledger:
            found = [ledger.get(ChunkKey("r", "c", "l", "s", who, k, k + 1)) for k in range(120)]
        assert found == [{"k": k, "who": who, "words": "lantern " * 60} for k in range(120)]


@pytest.mark.parametrize("pause", [0.0, 0.003, 0.011])
def test_killed_while_writing(tmp_path, pause):
    """After SIGKILL in the middle of writing the file is good, and holds every line that was said to be kept."""
    path = tmp_path / "kept.sqlite"
    process = writer(path, "one", 100_000)
    for _ in range(20):
        last = int(process.stdout.readline())
    time.sleep(pause)
    process.send_signal(signal.SIGKILL)
    last = max([last, *map(int, process.stdout.read().split("\n")[:-1])])
    process.wait()
    process.stdout.close()
    assert all(kept(path, "one", k)["k"] == k for k in range(last + 1))
    base = sqlite3.connect(path)
    assert base.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    for (text,) in base.execute("SELECT result FROM chunks"):
        json.loads(text)
    base.close()
