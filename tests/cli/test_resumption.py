"""A survey that is killed, again and again, ends with the same record as one that was left alone; on one machine and on a cluster."""

import json
import os
import random
import re
import signal
import sqlite3
import subprocess
import sys
import time
from pathlib import Path

import pytest
from planted import SMALL
from plugins import TABLE, marked, none_left, table_of, table_of_flags, write

from conjcheck import Fl

RULE = """
import time

@candidate(on=PartialFlags())
def tabulated(X, u, v):
    until = time.perf_counter() + {busy}
    values = known(X, u, v)
    while time.perf_counter() < until:
        pass
    return values
"""


@pytest.fixture(autouse=True)
def nothing_is_left(monkeypatch, tmp_path):
    """After each test no process is left."""
    monkeypatch.setenv("CONJCHECK_TEST_MARK", tmp_path.name)
    yield
    assert none_left(tmp_path.name)


class Project:
    """A folder with a rule that is right, by a table from elsewhere, and not too fast; and the survey of it."""

    def __init__(self, folder, kind):
        self.folder = folder
        folder.mkdir()
        self.path = write(folder, TABLE + RULE.replace("{busy}", "0.0004" if kind == "Fl(5)" else "0.004"))
        if kind == "Fl(5)":
            table_of_flags(folder, 5)
            self.spaces = [Fl(5)]
        else:
            table_of(folder, SMALL)
            self.spaces = list(SMALL)

    def start(self, *words):
        """The survey as a process of its own."""
        names = [X.name for X in self.spaces]
        command = [sys.executable, "-m", "conjcheck", "survey", str(self.path), *names, *words]
        return subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True)

    def finish(self, *words):
        """The survey to its end; what it prints."""
        process = self.start(*words)
        out, err = process.communicate(timeout=300)
        assert (process.returncode, err) == (0, ""), out + err
        return out

    @property
    def chunks(self):
        """How many chunks are kept."""
        try:
            base = sqlite3.connect(f"file:{self.folder / '.ledger.sqlite'}?mode=ro", uri=True)
            found = base.execute("SELECT COUNT(*) FROM chunks").fetchone()[0]
            base.close()
        except sqlite3.Error:
            return 0
        return found

    def wait_for(self, chunks, process):
        """Wait until so many chunks are kept, or the process has ended."""
        until = time.monotonic() + 120
        while self.chunks < chunks and process.poll() is None and time.monotonic() < until:
            time.sleep(0.01)

    @property
    def record(self):
        """The record, byte for byte but for the seconds."""
        return re.sub(r'"seconds": [\d.e-]+', '"seconds": 0', (self.folder / "records" / "tabulated.json").read_text())


def workers(mark):
    """The processes in which the rule is called."""
    return [pid for pid in marked(mark) if b"conjcheck.testing.worker" in Path(f"/proc/{pid}/cmdline").read_bytes()]


@pytest.fixture(params=["small", pytest.param("Fl(5)", marks=pytest.mark.slow)])
def pair(request, tmp_path):
    """A project that is disturbed, and the same one that was left alone."""
    alone = Project(tmp_path / "alone", request.param)
    alone.finish("--jobs", "2")
    rows = sum(X.number_of_classes**2 for X in alone.spaces)
    coverage = json.loads(alone.record)["coverage"]
    assert sum(entry["seen"] for entry in coverage) == sum(entry["of"] for entry in coverage) == rows
    if request.param == "Fl(5)":
        assert sum(entry["nonzero"] for entry in coverage) == 62_925
    return Project(tmp_path / "disturbed", request.param), alone


def test_killed_five_times(pair, tmp_path):
    """Killed at five moments, and its processes in between, it goes on each time where it was, and leaves the same record."""
    disturbed, alone = pair
    chooser, every = random.Random(7), alone.chunks
    for k in range(1, 6):
        process = disturbed.start("--jobs", "2")
        disturbed.wait_for(every * k // 7, process)
        time.sleep(chooser.random() * 0.1)
        for pid in workers(tmp_path.name)[:1]:
            os.kill(pid, signal.SIGKILL)
        time.sleep(chooser.random() * 0.2)
        assert process.poll() is None, process.communicate()
        process.kill()
        process.communicate()
        assert none_left(tmp_path.name)
    kept = disturbed.chunks
    assert every * 5 // 7 <= kept <= every
    out = disturbed.finish("--jobs", "2")
    assert "rows were taken from the ledger" in out.replace("of the rows", "rows")
    assert disturbed.record == alone.record


def cluster(folder, count):
    """A scheduler and some workers, each a process of its own: ``(address, scheduler, workers)``."""
    place = folder / "scheduler.json"
    quiet = {"stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL, "cwd": folder}
    start = [sys.executable, "-W", "ignore", "-m"]
    scheduler = subprocess.Popen(
        [
            *start,
            "distributed.cli.dask_scheduler",
            "--host",
            "127.0.0.1",
            "--port",
            "0",
            "--no-dashboard",
            "--scheduler-file",
            place,
        ],
        **quiet,
    )
    until = time.monotonic() + 60
    while not place.exists() or not place.read_text():
        assert scheduler.poll() is None
        assert time.monotonic() < until
        time.sleep(0.05)
    workers = [
        subprocess.Popen(
            [*start, "distributed.cli.dask_worker", "--scheduler-file", place, "--nthreads", "1", "--no-nanny", "--no-dashboard"],
            **quiet,
        )
        for _ in range(count)
    ]
    return json.loads(place.read_text())["address"], scheduler, workers


def test_a_cluster_that_loses_a_worker(pair, tmp_path):
    """On a cluster of two workers, one of them killed in the middle, the record is the same as on one machine."""
    pytest.importorskip("distributed")
    disturbed, alone = pair
    address, scheduler, helpers = cluster(tmp_path, 2)
    try:
        process = disturbed.start("--cluster", address)
        disturbed.wait_for(alone.chunks // 3, process)
        assert process.poll() is None, process.communicate()
        helpers[0].kill()
        out, err = process.communicate(timeout=200)
        assert process.returncode == 0, out + err
        assert disturbed.record == alone.record
    finally:
        for helper in [*helpers, scheduler]:
            helper.kill()
            helper.wait()
