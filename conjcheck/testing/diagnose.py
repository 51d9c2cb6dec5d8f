"""The diagnosis of a refuted conjecture: what its failures have in common, and on which sub-class it may be right."""

import ast
from collections.abc import Callable, Sequence
from linecache import getlines
from types import CodeType

import numpy as np

from conjcheck.conjecture.declare import Conjecture
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.weyl import Ints
from conjcheck.testing.compare import Comparer
from conjcheck.testing.conditions import Found
from conjcheck.testing.diagnosis import Condition, Diagnosis, Suggestion
from conjcheck.testing.gather import Table, place
from conjcheck.testing.minimise import Layer, Minimum
from conjcheck.testing.search import Looked, Search, inside, search

__all__ = ["diagnose", "worded"]

_NO_SOURCE = "your own premise"


def diagnose(comparer: Comparer, minimum: Minimum, layer: Layer | None = None, *, budget: float) -> Diagnosis | None:
    """Diagnose the failures of a refuted conjecture.

    Args:
        comparer: what compares.
        minimum: the smallest failure known, a refutation.
        layer: the failures of its space, as far as known: their rows are looked at first.
        budget: seconds, about; a single slow call of the rule can exceed it.

    Returns:
        The diagnosis; ``None`` if within the budget no failure or no agreement was met.
    """
    rows = dict.fromkeys(finding.row for finding in (minimum.finding, *(layer.findings if layer else ())))
    found = search(comparer, list(rows), budget=budget)
    return None if found is None else worded(comparer, found)


def worded(comparer: Comparer, found: Search) -> Diagnosis:
    """Everything in the words of a report."""
    looked = Looked(found.tables)
    return Diagnosis(
        int(looked.fails.sum()),
        int((~looked.fails).sum()),
        looked.known,
        _where(looked.tables),
        _signs(comparer, looked),
        _firsts(comparer, looked),
        tuple(
            Condition(one.words, one.expression, one.failing, one.informative + one.zeros, one.informative, others)
            for one, others in zip(found.conditions, found.others, strict=True)
        ),
        _suggestion(comparer, found.premise, looked, found.fresh) if found.premise else None,
        found.refused,
        found.unusable,
        comparer.is_claim and comparer.conjecture.by_rows,
    )


def _where(tables: Sequence[Table]) -> str:
    """The spaces of some tables: all, or the first and the last of many."""
    names = [X.name for X in sorted({table.cases.X for table in tables})]
    return ", ".join(names) if len(names) <= 4 else f"{len(names)} spaces from {names[0]} to {names[-1]}"


def _signs(comparer: Comparer, looked: Looked) -> tuple[str, ...]:
    """What holds for the errors everywhere: their sign, their size, their degrees."""
    conjecture, said = comparer.conjecture, list[str]()
    errors = np.concatenate([table.errors[table.fails] for table in looked.tables])
    if not comparer.is_claim and not conjecture.is_equivariant:
        few, many = int((errors < 0).sum()), int((errors > 0).sum())
        sizes = sorted({abs(error) for error in errors.tolist()})
        by = f", always by {sizes[0]}" if len(sizes) == 1 else f", by {sizes[0]} to {sizes[-1]:,}"
        if few and many:
            said.append(f"too small at {few:,} cases, too large at {many:,}{by}")
        else:
            said.append(f"always too {'small' if few else 'large'}{by}")
    if not conjecture.is_classical and not (comparer.is_claim and conjecture.by_rows):
        quantum = np.concatenate([table.cases.d[table.fails].any(axis=1) for table in looked.tables])
        if quantum.all():
            said.append("only at d > 0")
        elif not quantum.any():
            said.append("only at d = 0")
        else:
            said.append(f"at d = 0 ({int((~quantum).sum()):,}) and at d > 0 ({int(quantum.sum()):,})")
    return tuple(said)


def _firsts(comparer: Comparer, looked: Looked) -> tuple[tuple[str, Case | Row], ...]:
    """The smallest failure in each direction: n (or the rank), number of steps, |d|."""
    by_rows = comparer.is_claim and comparer.conjecture.by_rows
    failing = [table for table in looked.tables if table.fails.any()]
    directions: dict[str, Callable[[Table], Ints]] = {}
    if all(table.cases.X.kind.letter == "A" for table in failing):
        directions["n ="] = lambda table: np.full(len(table), table.cases.X.n)
    else:
        directions["rank"] = lambda table: np.full(len(table), table.cases.X.rank)
    if len({len(table.cases.X.marked) for table in failing}) > 1:
        directions["number of steps ="] = lambda table: np.full(len(table), len(table.cases.X.marked))
    if not by_rows and not comparer.conjecture.is_classical:
        directions["|d| ="] = lambda table: np.asarray(table.cases.d.sum(axis=1))
    found: list[tuple[str, Case | Row]] = []
    for words, level in directions.items():
        least = min(int(level(table)[table.fails].min()) for table in failing)
        places = [
            place(table, int(k), by_rows=by_rows)
            for table in failing
            for k in np.flatnonzero(table.fails & (level(table) == least))
        ]
        found.append((f"{words} {least}", min(places, key=lambda where: where.sort_key)))
    return tuple(found)


def _suggestion(comparer: Comparer, premise: Found, looked: Looked, fresh: tuple[Table, ...]) -> Suggestion:
    """The premise with the numbers of cases inside it."""
    conjecture = comparer.conjecture
    on_rows = premise.on_rows and conjecture.premise_by_rows
    holds = np.concatenate([inside(premise, table.cases) for table in looked.tables])
    new = sum(map(len, fresh))
    return Suggestion(
        premise.words,
        premise.expression,
        premise.on_rows,
        int(holds.sum()) + new,
        int((holds & looked.informative).sum()) + sum(int(table.informative.sum()) for table in fresh),
        new,
        _where(fresh),
        conjecture.premise is not None,
        "X, u, v" if on_rows else "X, u, v, w" if conjecture.is_classical else "X, u, v, w, d",
        _own_premise(conjecture),
    )


def _own_premise(conjecture: Conjecture) -> str:
    """The conjecture's own premise as a Python expression that can stand in its file; in words if its source is not at hand."""
    code = getattr(conjecture.premise, "__code__", None)
    if not isinstance(code, CodeType):
        return _NO_SOURCE
    names = list(code.co_varnames[: code.co_argcount])
    if code.co_qualname.isidentifier() and getattr(conjecture.rule, "__globals__", {}).get(code.co_name) is conjecture.premise:
        return f"{code.co_name}({', '.join(names)})"
    try:
        tree = ast.parse("".join(getlines(code.co_filename)))
    except (SyntaxError, ValueError):
        return _NO_SOURCE
    bodies = [
        node.body
        for node in ast.walk(tree)
        if isinstance(node, ast.Lambda) and node.lineno == code.co_firstlineno and [arg.arg for arg in node.args.args] == names
    ]
    return ast.unparse(bodies[0]) if code.co_name == "<lambda>" and len(bodies) == 1 else _NO_SOURCE
