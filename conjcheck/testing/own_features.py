"""The user's own features: functions of a case, called under the guard and the call limit."""

from collections.abc import Callable, Mapping
from functools import partial
from time import perf_counter
from typing import Any

import numpy as np

from conjcheck.oracle.guard import Watch, watched
from conjcheck.testing.features import Cases, Feature, Values
from conjcheck.testing.limits import CallInterrupted, CallLimit

__all__ = ["UnusableFeature", "own_features"]


def own_features(functions: Mapping[str, Callable[..., Any]], limit: CallLimit) -> tuple[Feature, ...]:
    """The user's own features ``{"in words": function of (X, u, v, w, d)}``.

    Their values are computed by calling the function under the guard and the call limit. A function that raises, takes too long, asks
    the oracle or gives something else than a ``bool``, an ``int`` or a ``str`` (one of these, everywhere) raises ``UnusableFeature``.
    """
    return tuple(
        Feature(words, f"not: {words}", "case", partial(_called_everywhere, function, limit), "", 0)
        for words, function in functions.items()
    )


class UnusableFeature(Exception):
    """A user's feature that gives no values; the message says why."""


def _called_everywhere(function: Callable[..., Any], limit: CallLimit, cases: Cases) -> Values:
    found: list[Any] = []
    watch, X, classes = Watch(), cases.X, cases.X.classes
    try:
        with limit, watched(watch):
            for u, v, w, d in zip(cases.u.tolist(), cases.v.tolist(), cases.w.tolist(), cases.d.tolist(), strict=True):
                limit.started = perf_counter()
                found.append(function(X, classes[u], classes[v], classes[w], tuple(d)))
    except KeyboardInterrupt:
        raise
    except CallInterrupted:
        raise UnusableFeature(f"one call took longer than {limit.seconds:g} s") from None
    except BaseException as error:
        raise UnusableFeature(f"{type(error).__name__}: {' '.join(str(error).split())}") from None
    finally:
        limit.started = 0.0
    if watch.asked:
        raise UnusableFeature("expected a feature that is computed from the case alone, but it asked the oracle")
    return _as_array(found)


def _as_array(found: list[Any]) -> Values:
    """The values of a user's feature as an array of one type."""
    kinds = {type(value) for value in found}
    if kinds <= {bool, np.bool_}:
        return np.array(found, dtype=bool)
    if kinds <= {str}:
        return np.array(found, dtype=np.str_)
    if all(hasattr(kind, "__index__") for kind in kinds) and not kinds & {bool, np.bool_}:
        return np.array([value.__index__() for value in found], dtype=np.int64)
    shown = ", ".join(sorted(kind.__name__ for kind in kinds))
    raise UnusableFeature(f"expected bool, int or str, the same everywhere, got {shown}")
