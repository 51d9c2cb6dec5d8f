"""What the tests of the oracle share: bilinear extension, a reader of printed tables, and the plain script as a second opinion."""

import importlib.util
import re
from collections import Counter
from functools import cache
from pathlib import Path

import pytest

from conjcheck import product


def times_elements(x, y, engine=None):
    """The product of two elements ``{(w, d): c}`` of QH*(X), by bilinearity."""
    total = Counter()
    for (u, d), a in x.items():
        for (v, e), b in y.items():
            for (w, f), count in product(u, v, engine=engine).items():
                total[w, tuple(map(sum, zip(d, e, f, strict=True)))] += a * b * count
    return {term: count for term, count in total.items() if count}


def read_element(X, text):
    """An element written as ``q1^2 q2 S3124 + 2 s321 + q``: S one-line, s a partition; without either the unit class."""
    total = Counter()
    for term in text.split("+"):
        count, d, w = 1, [0] * len(X.marked), X.identity
        for factor in term.split():
            if factor.isdigit():
                count = int(factor)
            elif factor[0] == "S":
                w = X.schubert(permutation=map(int, factor[1:]))
            elif factor[0] == "s":
                w = X.schubert(partition=map(int, factor[1:]))
            else:
                node, power = re.fullmatch(r"q(\d*)(?:\^(\d+))?", factor).groups()
                d[X.marked.index(int(node)) if node else 0] += int(power or 1)
        total[w, tuple(d)] += count
    return dict(total)


@pytest.fixture(scope="session")
def times():
    """``times(x, y)``: the product of two elements ``{(w, d): c}``."""
    return times_elements


@pytest.fixture(scope="session")
def read():
    """``read(X, "q1 S213 + S321")``: an element as printed."""
    return read_element


@pytest.fixture(scope="session")
def plain():
    """``plain(n)``: the rows ``{(u, v): {(w, d): N}}`` of ``Fl(n)`` by the plain script, permutations as tuples."""
    path = Path(__file__).parents[1] / "benchmarks" / "plain_scipy.py"
    spec = importlib.util.spec_from_file_location("plain_scipy", path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return cache(lambda n: dict(module.fill(n).constants()))
