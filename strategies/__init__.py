"""Hypothesis strategies: flag varieties, Schubert classes, permutations, partitions, degrees, rows, cases.

Everything shrinks towards the small end of the one order of ``conjcheck.geometry.case``.
"""

if __name__ != "conjcheck.strategies":
    raise ImportError(
        f"expected this package to be imported as conjcheck.strategies, got {__name__!r}; install conjcheck "
        "(pip install -e . in a checkout) and write: from conjcheck.strategies import rows"
    )

from conjcheck.strategies.cases import cases
from conjcheck.strategies.classes import schubert_classes
from conjcheck.strategies.degrees import degrees
from conjcheck.strategies.rows import rows
from conjcheck.strategies.shapes import partitions, permutations
from conjcheck.strategies.varieties import flag_varieties

__all__ = [
    "cases",
    "degrees",
    "flag_varieties",
    "partitions",
    "permutations",
    "rows",
    "schubert_classes",
]
