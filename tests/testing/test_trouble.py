"""From an exception to a finding."""

import pytest
from planted import cases_of

from conjcheck import Case, Fl, OutsideDomain
from conjcheck.errors import NotIndependent
from conjcheck.testing.answer import WrongAnswer
from conjcheck.testing.limits import CallInterrupted
from conjcheck.testing.trouble import trouble

PLACE = Case(*cases_of(Fl(3))[40])


def raised(error):
    """The exception with a traceback through this file."""
    try:
        raise error
    except BaseException as caught:
        return caught


@pytest.mark.parametrize(
    ("error", "status", "detail"),
    [
        (CallInterrupted(), "too-slow", "one call took longer than 2.5 s"),
        (OutsideDomain("long"), "undefined", "the rule says that this is outside its domain: long"),
        (OutsideDomain(), "undefined", "the rule says that this is outside its domain: no reason given"),
        (NotIndependent("asked"), "not-independent", "asked"),
        (WrongAnswer("no count"), "not-a-count", "no count"),
        (ZeroDivisionError("by zero"), "crashed", "ZeroDivisionError: by zero"),
        (SystemExit(), "crashed", "SystemExit"),
        (ValueError("one\n  two"), "crashed", "ValueError: one two"),
    ],
    ids=lambda value: type(value).__name__,
)
def test_statuses(error, status, detail):
    """Each kind of exception has its status, and its message becomes one line."""
    finding = trouble(PLACE, raised(error), limit=2.5, file=__file__)
    assert (finding.status, finding.where, finding.detail) == (status, PLACE, detail)
    assert bool(finding.trace) == (status == "crashed")


def deep(levels):
    """Raise some levels down."""
    if levels:
        deep(levels - 1)
    raise KeyError("deep down")


def test_the_traceback_begins_in_the_plugin():
    """Frames above the plug-in file are cut off, the middle of long ones too; the last line is the exception."""
    try:
        deep(50)
    except KeyError as error:
        finding = trouble(PLACE, error, limit=1, file=__file__)
    lines = finding.trace.splitlines()
    assert lines[-1] == "KeyError: 'deep down'"
    assert "in test_the_traceback_begins_in_the_plugin" in lines[0]
    assert 3 <= sum(line.startswith("  File ") for line in lines) <= 6


def test_an_exception_from_elsewhere():
    """Without a frame in the plug-in file the last frame is shown."""
    finding = trouble(PLACE, raised(ValueError("x")), limit=1, file="elsewhere.py")
    assert finding.trace.count("  File ") == 1
    assert "in raised" in finding.trace


def test_an_exception_without_words():
    """An exception that cannot say its message is reported all the same."""

    class Mute(Exception):
        def __str__(self):
            raise LookupError

    assert trouble(PLACE, raised(Mute()), limit=1, file=__file__).detail == "Mute: (its message raised LookupError)"
