"""Arguments of strategies, checked when the strategy is made, not when it is drawn from."""

from collections.abc import Callable, Iterable
from typing import Any

from hypothesis.errors import InvalidArgument

from conjcheck.geometry.families import Family
from conjcheck.geometry.flag_variety import FlagVariety

__all__ = ["read_choice", "read_family", "read_integer", "read_premise", "read_variety"]


def read_integer(name: str, value: object, *, least: int) -> int:
    """An integer of at least ``least``; ``True`` is no integer."""
    if not isinstance(value, int) or isinstance(value, bool) or value < least:
        raise InvalidArgument(f"expected an integer of {least} or more for {name}, got {name}={value!r} ({type(value).__name__})")
    return value


def read_family(on: object) -> Family:
    """A family of flag varieties."""
    if not isinstance(on, Family):
        raise InvalidArgument(f"expected a family for on, got on={on!r}; write on=Grassmannians() or on=Varieties(X)")
    return on


def read_variety(X: object) -> FlagVariety:
    """A flag variety."""
    if not isinstance(X, FlagVariety):
        raise InvalidArgument(f"expected a flag variety for X, got X={X!r}; write Gr(2, 4) or FlagVariety('Fl(1,3;4)')")
    return X


def read_premise(premise: object) -> Callable[..., Any] | None:
    """A predicate on rows, or ``None``."""
    if premise is not None and not callable(premise):
        raise InvalidArgument(f"expected a function of (X, u, v) for premise, got premise={premise!r}; write lambda X, u, v: ...")
    return premise


def read_choice(name: str, value: object, choices: Iterable[str]) -> str:
    """One of a few words."""
    words = tuple(choices)
    if not isinstance(value, str) or value not in words:
        raise InvalidArgument(f"expected {name} to be one of {', '.join(map(repr, words))}, got {name}={value!r}")
    return value
