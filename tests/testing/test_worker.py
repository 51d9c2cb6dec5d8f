"""The process that calls a rule, from inside: marks, chunks compared whole, carefully, or in part; and how it ends."""

import json
import os
import signal
import subprocess
import sys
import time
from dataclasses import asdict, replace

import pytest
from planted import cases_of
from plugins import POWERS, marked, none_left, write

from conjcheck import Fl
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import rows
from conjcheck.testing.chunks import Chunk, ChunkResult
from conjcheck.testing.worker import Marks, run_chunk

FAULTY = POWERS.replace("    power =", "    if (u.length, v.length) in ((1, 1), (2, 1)):\n        return 7\n    power =")


@pytest.fixture
def marks(tmp_path):
    """The marks of a process."""
    path = tmp_path / "marks"
    path.write_bytes(b"\0" * Marks.SIZE)
    return Marks(path)


def chunk_of(path, **choices):
    """All rows of Gr(1,3)."""
    good = Chunk(str(path), "powers", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
    return replace(good, **choices)


def test_marks(tmp_path, marks):
    """Whoever opens the file sees the beat, the row and the outcome; beats only rise."""
    other = Marks(tmp_path / "marks")
    marks.clear()
    assert other.read()[1:] == (Marks.NOWHERE, 0)
    marks.row(7)
    beat, row, outcome = other.read()
    assert (row, outcome) == (7, 0)
    marks.outcome(0)
    assert other.read() == (beat + 1, 7, 1)
    marks.row(8)
    assert other.read() == (beat + 2, 8, 0)
    marks.beat()
    assert other.read() == (beat + 3, 8, 0)


def test_a_whole_chunk(tmp_path, marks):
    """A chunk is compared, and the last row stays marked."""
    found = run_chunk(chunk_of(write(tmp_path, POWERS)), marks)
    assert (found.seen, found.cases, found.findings) == (9, 9, ())
    assert marks.read()[1] == 8


def test_one_row_in_part(tmp_path, marks):
    """Of one row, all failures among the first outcomes are collected."""
    path = write(tmp_path, FAULTY.replace("ProjectiveSpaces()", "Varieties('Fl(3)')").replace("X.n", "99"))
    size = len([c for c in cases_of(Fl(3)) if (c[1].length, c[2].length) == (2, 1) and c[1].index == 3 and c[2].index == 1])
    place = next(k for k in range(36) if classes_at(k) == (3, 1))
    for until in range(size + 1):
        found = run_chunk(chunk_of(path, space="Fl(3)").part(place, place + 1), marks, until=until)
        assert len(found.findings) == found.failing == until
        assert ChunkResult.parse(json.loads(json.dumps(found.as_json()))) == found


def classes_at(place):
    """The places of the two classes of a row of Fl(3)."""
    (row,) = rows(Fl(3), place, place + 1)
    return row.u.index, row.v.index


def test_carefully(tmp_path, marks):
    """Carefully, every outcome of the row is marked before it is asked, also after one that differs."""
    path = write(tmp_path, FAULTY)
    run_chunk(chunk_of(path).part(4, 5), marks, careful=True)
    assert marks.read()[1:] == (4, 1)


def started(tmp_path):
    """A process of its own, and its marks."""
    path = tmp_path / "marks.of.process"
    path.write_bytes(b"\0" * Marks.SIZE)
    marks = Marks(path)
    process = subprocess.Popen(
        [sys.executable, "-m", "conjcheck.testing.worker", path, str(os.getpid())],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )
    return process, marks, path


def task(number, chunk):
    """A line for it."""
    return json.dumps({"task": number, "chunk": asdict(chunk), "careful": False, "until": None}) + "\n"


def test_it_ends_with_its_input(tmp_path):
    """It answers every task by its number, takes its file away, and ends with status 0 when its input does."""
    chunk = chunk_of(write(tmp_path, POWERS))
    process, _, path = started(tmp_path)
    out, _ = process.communicate(task(1, chunk) + task(7, chunk.part(2, 5)), timeout=30)
    answers = [json.loads(line) for line in out.splitlines()]
    assert [(a["task"], a["again"], a["result"]["seen"]) for a in answers] == [(1, False, 9), (7, False, 3)]
    assert process.returncode == 0
    assert not path.exists()


@pytest.mark.parametrize("body", ["time.sleep(1000)", "sum(iter(int, 1))", "sum(itertools.repeat(1))"])
def test_it_ends_with_its_parent(tmp_path, monkeypatch, body):
    """When its parent is killed it ends, even in the middle of a call that no signal interrupts."""
    monkeypatch.setenv("CONJCHECK_TEST_MARK", tmp_path.name)
    path = write(tmp_path, "import itertools, time\n" + POWERS.replace("    power =", f"    {body}\n    power =", 1))
    chunk = chunk_of(path, call_limit=1000.0)
    code = "import sys\nfrom conjcheck.testing.isolation import isolated\nisolated(sys.argv[1])\n"
    parent = subprocess.Popen([sys.executable, "-c", code, chunk.as_text()])
    until = time.monotonic() + 20
    while len(marked(tmp_path.name)) < 2 and time.monotonic() < until:
        time.sleep(0.02)
    time.sleep(1.0)
    assert len(marked(tmp_path.name)) == 2
    os.kill(parent.pid, signal.SIGKILL)
    parent.wait()
    assert none_left(tmp_path.name, 5.0)


def test_it_does_not_begin_without_its_parent(tmp_path):
    """If whoever started it is gone when it is ready, it does nothing."""
    path = tmp_path / "marks.of.process"
    path.write_bytes(b"\0" * Marks.SIZE)
    command = [sys.executable, "-m", "conjcheck.testing.worker", path, "1"]
    done = subprocess.run(command, input=task(1, chunk_of(write(tmp_path, POWERS))), capture_output=True, text=True, check=True)
    assert done.stdout == ""
    assert not path.exists()
