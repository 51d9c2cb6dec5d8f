"""The time limit for single calls."""

import os
import signal
import threading
import time
from time import perf_counter

import pytest

from conjcheck.testing.limits import CallInterrupted, CallLimit


def spin(seconds):
    """Keep the interpreter busy, without a system call."""
    until = perf_counter() + seconds
    while perf_counter() < until:
        pass


@pytest.mark.parametrize("work", [spin, time.sleep], ids=["busy", "asleep"])
def test_interrupts(work):
    """A call that runs, or sleeps, beyond the limit is interrupted soon after it."""
    began = perf_counter()
    with CallLimit(0.15) as limit, pytest.raises(CallInterrupted):
        limit.started = perf_counter()
        work(5)
    assert 0.15 < perf_counter() - began < 4


def test_each_call_has_the_whole_limit():
    """Time counts from the last start: many short calls never add up."""
    with CallLimit(0.8) as limit:
        for _ in range(5):
            limit.started = perf_counter()
            spin(0.3)


def test_nothing_started_nothing_interrupted():
    """With ``started`` at 0 nothing is interrupted, whatever it takes."""
    with CallLimit(0.05) as limit:
        assert limit.started == 0.0
        spin(0.4)


def test_not_an_exception():
    """A rule that catches every ``Exception`` does not catch the interruption."""
    with CallLimit(0.1) as limit, pytest.raises(CallInterrupted):
        limit.started = perf_counter()
        while True:
            try:
                spin(1)
            except Exception:
                pass


def test_restores_the_alarm():
    """Handler and timer are those from before, also after nesting and after an error."""
    before = signal.getsignal(signal.SIGALRM)
    with CallLimit(5) as outer:
        with CallLimit(0.1) as inner, pytest.raises(CallInterrupted):
            inner.started = perf_counter()
            spin(5)
        outer.seconds, outer.started = 0.1, perf_counter()
        with pytest.raises(CallInterrupted):
            spin(5)
    assert signal.getsignal(signal.SIGALRM) is before
    assert signal.getitimer(signal.ITIMER_REAL) == (0.0, 0.0)


def test_in_another_thread():
    """Outside the main thread a second thread raises the interruption in the right one."""
    ended = []

    def call():
        with CallLimit(0.15) as limit:
            limit.started = perf_counter()
            try:
                spin(5)
            except CallInterrupted:
                ended.append(threading.current_thread())

    thread = threading.Thread(target=call)
    began = perf_counter()
    thread.start()
    spin(0.5)
    thread.join()
    assert ended == [thread]
    assert perf_counter() - began < 4


def test_ticks():
    """The alarm tells that the interpreter is alive, a few times a second, until a call is over its limit."""
    ticks = []
    with CallLimit(0.35, lambda: ticks.append(perf_counter())) as limit:
        spin(0.5)
        assert 1 <= len(ticks) <= 6
        limit.started = began = perf_counter()
        swallowed = 0
        while swallowed < 3:
            try:
                spin(5)
            except CallInterrupted:
                swallowed += 1
        assert max(ticks) - began < 0.45
    after = len(ticks)
    spin(0.3)
    assert len(ticks) == after


def test_a_rule_does_not_end_the_run():
    """``os._exit`` raises while a call is limited, but in a forked copy it ends that copy; afterwards it is the real one again."""
    real = os._exit
    with CallLimit(5.0), CallLimit(5.0):
        with pytest.raises(SystemExit, match=r"os\._exit\(0\) was called"):
            os._exit(0)
        child = os.fork()
        if not child:
            os._exit(7)
        assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 7
    assert os._exit is real
