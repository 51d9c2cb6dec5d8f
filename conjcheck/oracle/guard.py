"""Who is asking: while a rule runs, a question to the oracle is noticed, because the answer would not be independent.

And what a rule reads, in processes that only call rules.
"""

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from types import FrameType
from typing import Any

from conjcheck.errors import NotIndependent

__all__ = ["Watch", "askers", "note_question", "opened", "watch_opened", "watched"]

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


_opened: set[str] = set()
_hooked = False


def watch_opened() -> None:
    """Notice from now on every file that is opened to be read while somebody is watched. That cannot be ended in a process."""
    global _hooked  # noqa: PLW0603
    if not _hooked:
        sys.addaudithook(_note_opened)
        _hooked = True


def _note_opened(event: str, given: tuple[Any, ...]) -> None:
    if event == "open" and _watches and isinstance(given[0], str) and not given[2] & (os.O_WRONLY | os.O_RDWR):
        _opened.add(given[0])


def opened() -> frozenset[str]:
    """The files that were opened so, by the names that were used."""
    return frozenset(_opened)
