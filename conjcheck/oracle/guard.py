"""Who is asking: while a rule runs, a question to the oracle is noticed, because the answer would not be independent."""

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from types import FrameType

from conjcheck.errors import NotIndependent

__all__ = ["Watch", "askers", "note_question", "watched"]

_OURS = str(Path(__file__).parents[1])


class Watch:
    """What was noticed while somebody else's code ran.

    Args:
        forbidding: whether a question raises ``NotIndependent``; otherwise it is only noticed.

    Attributes:
        asked: whether the oracle was asked; it stays true even if the code swallowed the error.
    """

    __slots__ = ("asked", "forbidding")

    def __init__(self, *, forbidding: bool = True) -> None:
        self.asked = False
        self.forbidding = forbidding


_watches: list[Watch] = []
_askers: set[str] = set()


@contextmanager
def watched(watch: Watch) -> Iterator[None]:
    """Everything inside the block is somebody else's doing."""
    _watches.append(watch)
    try:
        yield
    finally:
        _watches.pop()


def note_question() -> None:
    """Called by the oracle, and by each of its engines, at each question.

    Raises:
        NotIndependent: a rule is running.
    """
    if _watches:
        _watches[-1].asked = True
        if not _watches[-1].forbidding:
            _note_askers()
        else:
            raise NotIndependent(
                "the oracle was asked by the rule that it is meant to judge; compute the value from the rule alone"
            )


def _note_askers() -> None:
    """Remember whose code is asking: a helper that tabulates the oracle is imported once, and used by many."""
    frame: FrameType | None = sys._getframe(2)  # noqa: SLF001  # the documented way to the callers
    while frame is not None:
        if not frame.f_code.co_filename.startswith(_OURS):
            _askers.add(frame.f_code.co_filename)
        frame = frame.f_back


def askers() -> frozenset[Path]:
    """The files that asked the oracle while somebody watched who forbade nothing: while plug-ins were imported."""
    return frozenset(Path(name).resolve() for name in _askers)
