"""Who is asking: while a rule runs, a question to the oracle is noticed, because the answer would not be independent."""

from collections.abc import Iterator
from contextlib import contextmanager

from conjcheck.errors import NotIndependent

__all__ = ["Watch", "note_question", "rule_running"]


class Watch:
    """What was noticed while a rule ran; ``asked`` stays true even if the rule swallowed the error."""

    __slots__ = ("asked",)

    def __init__(self) -> None:
        self.asked = False


_running: list[Watch] = []


@contextmanager
def rule_running(watch: Watch) -> Iterator[None]:
    """Everything inside the block is the rule's own doing."""
    _running.append(watch)
    try:
        yield
    finally:
        _running.pop()


def note_question() -> None:
    """Called by the oracle at each question.

    Raises:
        NotIndependent: a rule is running.
    """
    if _running:
        _running[-1].asked = True
        raise NotIndependent("the oracle was asked by the rule that it is meant to judge; compute the value from the rule alone")
