"""From an exception that ended a call to the finding that says so."""

import traceback

from conjcheck.errors import NotIndependent, OutsideDomain
from conjcheck.geometry.case import Case, Row
from conjcheck.testing.answer import WrongAnswer
from conjcheck.testing.finding import Finding
from conjcheck.testing.limits import CallInterrupted

__all__ = ["trouble"]


def trouble(place: Case | Row, error: BaseException, *, limit: float, file: str) -> Finding:
    """The finding for a call that ended with an exception instead of an answer.

    Args:
        place: where the rule was called.
        error: what came.
        limit: the seconds a call may take.
        file: the plug-in file; the traceback is cut above it.
    """
    if isinstance(error, CallInterrupted):
        return Finding("too-slow", place, detail=f"one call took longer than {limit:g} s")
    if isinstance(error, OutsideDomain):
        reason = _text(error) or "no reason given"
        return Finding("undefined", place, detail=f"the rule says that this is outside its domain: {reason}")
    if isinstance(error, NotIndependent):
        return Finding("not-independent", place, detail=_text(error))
    if isinstance(error, WrongAnswer):
        return Finding("not-a-count", place, detail=_text(error))
    detail = f"{type(error).__name__}: {_text(error)}".rstrip(": ")
    return Finding("crashed", place, detail=detail, trace=_trace(error, file))


def _text(error: BaseException) -> str:
    """The message of an exception on one line, even of one that cannot say it."""
    try:
        return " ".join(str(error).split())
    except Exception as second:
        return f"(its message raised {type(second).__name__})"


def _trace(error: BaseException, file: str) -> str:
    """The traceback from the plug-in file on, without the harness; long ones without their middle."""
    frames = traceback.extract_tb(error.__traceback__)
    first = next((k for k, frame in enumerate(frames) if frame.filename == file), max(len(frames) - 1, 0))
    shown = frames[first:]
    lines = traceback.format_list(shown if len(shown) <= 6 else [*shown[:3], *shown[-3:]])
    return "".join(lines) + f"{type(error).__name__}: {_text(error)}"
