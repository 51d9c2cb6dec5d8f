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

_EXAMINING = str(Path(__file__).parents[1] / "testing")


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
        if _watches[-1].forbidding:
            raise NotIndependent(
                "the oracle was asked by the rule that it is meant to judge; compute the value from the rule alone"
            )
    _note_askers()


def _note_askers() -> None:
    """Remember the files whose import is asking: a helper that tabulates the oracle is imported once, by whomever, and used by many."""
    frame: FrameType | None = sys._getframe(2)  # noqa: SLF001  # the documented way to the callers
    modules = []
    while frame is not None:
        if frame.f_code.co_filename.startswith(_EXAMINING):
            return  # it is the comparison that asks
        if frame.f_code.co_name == "<module>":
            modules.append(frame.f_code.co_filename)
        frame = frame.f_back
    _askers.update(modules)


def askers() -> frozenset[Path]:
    """The files that asked the oracle while they were imported by this process."""
    return frozenset(Path(name).resolve() for name in _askers)


_MOST_OPENED = 10_000
_opened: set[str] = set()
_hooked = False


def watch_opened() -> None:
    """Notice from now on what is opened to be read, by ``open``, while somebody is watched: in an import, or in a candidate.

    That cannot be ended in a process. At most 10,000 names are kept.
    """
    global _hooked  # noqa: PLW0603
    if not _hooked:
        sys.addaudithook(_note_opened)
        _hooked = True


def _note_opened(event: str, given: tuple[Any, ...]) -> None:
    if event != "open" or not _watches or len(_opened) >= _MOST_OPENED:
        return
    name, _, flags = given
    if isinstance(name, str) and not flags & (os.O_WRONLY | os.O_RDWR):
        _opened.add(name)


def opened() -> frozenset[str]:
    """The files that were opened so, by the names that were used."""
    return frozenset(_opened)
