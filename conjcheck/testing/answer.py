"""What a rule may answer: an exact count, or distinct objects that are counted."""

from collections.abc import Iterable, Mapping
from reprlib import Repr
from typing import Any

from conjcheck.geometry.polynomial import RootPolynomial, read_polynomial
from conjcheck.oracle.equivariant import MOST_DEGREE

__all__ = ["Value", "WrongAnswer", "count_of", "plain_value", "polynomial_of", "shown_objects", "shown_value", "truth_of"]

Value = int | RootPolynomial
"""What a rule gives at a case: a count, or in the equivariant rings a polynomial."""

_MOST_SHOWN = 12
_SHORT, _LONG = Repr(), Repr()
_SHORT.maxstring = _SHORT.maxother = 80
_LONG.maxtuple = _LONG.maxlist = _LONG.maxset = _LONG.maxfrozenset = _LONG.maxdict = 60
_LONG.maxlevel, _LONG.maxstring, _LONG.maxother = 8, 300, 300
_MOST_OBJECTS = 100_000


class WrongAnswer(Exception):
    """The answer is no count; the message says what was expected, what came, what to do."""


def count_of(answer: Any) -> int:
    """The count an answer stands for: an integer of 0 or more (also of numpy or sympy), or distinct hashable objects.

    Raises:
        WrongAnswer: anything else.
    """
    count, _ = _counted(answer)
    return count


def shown_objects(answer: Any) -> tuple[str, ...] | None:
    """The first objects of an answer as text; ``None`` if it is a number."""
    _, objects = _counted(answer)
    if objects is None:
        return None
    shown = tuple(_LONG.repr(thing) for thing in objects[:_MOST_SHOWN])
    return shown if len(objects) <= _MOST_SHOWN else (*shown, f"... {len(objects) - _MOST_SHOWN} more")


def shown_value(value: object) -> str:
    """A value as text; of an integer with too many digits only its size."""
    if isinstance(value, int) and value.bit_length() >= 4_000:
        return f"an integer of {value.bit_length():,} bits"
    return str(value)


def plain_value(value: object) -> int | str | None:
    """A value for JSON: small integers as they are, others and polynomials as text."""
    return value if value is None or (isinstance(value, int) and value.bit_length() < 64) else shown_value(value)


def polynomial_of(answer: Any, rank: int) -> RootPolynomial:
    """The polynomial in the simple roots that an answer stands for.

    Raises:
        WrongAnswer: it stands for none, or for one of a degree that no structure constant has.
    """
    found = read_polynomial(answer, rank)
    if found is None:
        raise WrongAnswer(
            f"expected a polynomial in the {rank} simple roots, got {_kind(answer)} {_SHORT.repr(answer)}; build it from simple_roots(X), "
            "or as a sympy expression in alpha1, alpha2, ... with integer coefficients"
        )
    if found.degree > MOST_DEGREE:
        raise WrongAnswer(f"expected a polynomial of degree at most {MOST_DEGREE}, got one of degree {found.degree}")
    return found


def _counted(answer: Any) -> tuple[int, list[Any] | None]:
    if type(answer) is int:
        number = answer
    elif (whole := _index(answer)) is not None:
        number = whole
    elif answer is None:
        raise WrongAnswer("expected a count, got None; does the rule return on every path?")
    elif (
        isinstance(answer, (str, bytes, bytearray, memoryview, Mapping))
        or hasattr(answer, "__array__")
        or not isinstance(answer, Iterable)
    ):
        raise WrongAnswer(
            f"expected an int of 0 or more or an iterable of objects, got {_kind(answer)} {_SHORT.repr(answer)}; "
            "a count is exact: return an int"
        )
    else:
        return _distinct(answer)
    if number < 0:
        raise WrongAnswer(f"expected a count of 0 or more, got the negative number {shown_value(number)}")
    return number, None


def _index(answer: Any) -> int | None:
    """The exact integer behind a number of any library, ``None`` if there is none (also for an array with one entry)."""
    if getattr(answer, "ndim", 0):
        return None
    try:
        return int(answer.__index__())
    except (AttributeError, TypeError):
        return None


def _distinct(answer: Iterable[Any]) -> tuple[int, list[Any]]:
    objects, seen = [], set()
    for place, thing in enumerate(answer, start=1):
        try:
            hash(thing)
        except TypeError:
            raise WrongAnswer(
                f"expected hashable objects, got object {place} = {_SHORT.repr(thing)} of type {type(thing).__name__}; "
                "return tuples instead"
            ) from None
        if thing in seen:
            raise WrongAnswer(f"expected distinct objects, got {_SHORT.repr(thing)} a second time, as object {place}")
        seen.add(thing)
        objects.append(thing)
        if place > _MOST_OBJECTS:
            raise WrongAnswer(f"expected at most {_MOST_OBJECTS:,} objects, got more; return their number instead")
    return len(objects), objects


def truth_of(answer: Any) -> bool:
    """The truth value that a claim returned.

    Raises:
        WrongAnswer: not a ``bool`` (of Python, numpy or sympy).
    """
    if answer is True or answer is False:
        return bool(answer)
    if type(answer).__name__ in ("bool", "bool_", "BooleanTrue", "BooleanFalse"):
        return bool(answer)
    raise WrongAnswer(f"expected True or False from a claim, got {_kind(answer)} {_SHORT.repr(answer)}")


def _kind(answer: Any) -> str:
    name = type(answer).__name__
    return f"{'an' if name[0] in 'aeiouAEIOU' else 'a'} {name}"
