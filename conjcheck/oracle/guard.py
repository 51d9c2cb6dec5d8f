"""Who is asking: while a rule runs, a question to the oracle is noticed, because the answer would not be independent."""

from collections.abc import Iterator
from contextlib import contextmanager

from conjcheck.errors import NotIndependent

__all__ = ["Watch", "note_question", "watched"]


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
