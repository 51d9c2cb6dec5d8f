"""Work in a copy of this process: its result, or how it was lost."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from conjcheck import Case, Gr
from conjcheck.errors import RecordError
from conjcheck.testing.apart import Lost, apart


def test_the_result_comes_back():
    """Results are those of the work, however large; classes and spaces keep their identity, and so do shared objects."""
    shared = object()
    case = Case.parse("Gr(2,4): (2,1) * (2,1) -> (2), q^(1)")
    found = apart(lambda: (case, [shared], "x" * 3_000_000), seconds=30.0, shared=(shared,))
    assert found == (case, [shared], "x" * 3_000_000)
    assert found[0].X is Gr(2, 4)
    assert found[1][0] is shared


def test_it_is_another_process():
    """What the work does to its process stays there."""
    here = {}

    def work():
        here["changed"] = True
        os.chdir("/")
        return os.getpid()

    before = Path.cwd()
    assert apart(work, seconds=30.0) != os.getpid()
    assert (here, Path.cwd()) == ({}, before)


def test_errors_of_ours():
    """An error of conjcheck comes through; any other one is a loss, with its words."""

    def ours():
        raise RecordError("no record")

    with pytest.raises(RecordError, match="no record"):
        apart(ours, seconds=30.0)
    with pytest.raises(Lost, match="it raised ZeroDivisionError"):
        apart(lambda: 1 // 0, seconds=30.0)
    with pytest.raises(Lost, match="it raised SystemExit: 0"):
        apart(lambda: sys.exit(0), seconds=30.0)


@pytest.mark.parametrize(
    ("work", "words"),
    [
        (lambda: os._exit(0), "its process ended itself, with status 0"),
        (lambda: os._exit(3), "its process ended itself, with status 3"),
        (lambda: os.kill(os.getpid(), signal.SIGTERM), "its process was ended by signal 15"),
        (lambda: time.sleep(1000), "it took longer than 0.5 s"),
        (lambda: sum(iter(int, 1)), "it took longer than 0.5 s"),
    ],
)
def test_losses(work, words):
    """However the copy ends, that is told in time."""
    began = time.monotonic()
    with pytest.raises(Lost, match=words):
        apart(work, seconds=0.5)
    assert time.monotonic() - began < 10


def test_nothing_is_left():
    """The copy and its children are gone afterwards, and nothing was printed."""

    def work():
        child = subprocess.Popen(["sleep", "1000"])
        return os.getpid(), child.pid

    for pid in apart(work, seconds=30.0):
        until = time.monotonic() + 5
        while Path(f"/proc/{pid}").exists() and "\nState:\tZ" not in Path(f"/proc/{pid}/status").read_text():
            assert time.monotonic() < until
            time.sleep(0.01)


def test_output(capfd):
    """What the work prints goes nowhere."""

    def work():
        print("lantern")
        os.write(1, b"lantern")
        sys.stderr.write("lantern")

    apart(work, seconds=30.0)
    assert capfd.readouterr() == ("", "")
