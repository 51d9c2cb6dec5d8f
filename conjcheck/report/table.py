"""All nonzero structure constants of one space as a file that explains itself: CSV, JSON lines or LaTeX, streamed product by product."""

import csv
import io
import json
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from itertools import groupby
from operator import itemgetter

import numpy as np

from conjcheck.errors import NotationError
from conjcheck.evidence.entries import own_version
from conjcheck.geometry.case import place_in_row, rows
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.geometry.notation import text_of_permutation
from conjcheck.geometry.signed import text_of_signed
from conjcheck.geometry.typeset import latex_class, latex_power, latex_space, latex_text
from conjcheck.oracle import engines_for, row_terms, table

__all__ = ["FORMS", "ORDERS", "TableOptions", "class_text", "notations", "table_lines"]

FORMS = ("csv", "json", "latex")
ORDERS = {
    "cases": "rows in the order of cases: l(u) + l(v), l(u), u, v; then sum of d, d, w",
    "blocks": "u in the order in which the engine computes; for each u by v, then sum of d, d, w",
}
"""The orders of the lines, and how the file describes them."""

_CONVENTIONS = {
    "permutation": "one-line notation of the minimal representative, 1-based, with dots from n = 10 on; s1 s2 is 231",
    "signed": "signed permutation w(1).w(2)..., a minus sign for a bar",
    "partition": "partition: Gr(k,n) has lambda_i = w(k+1-i) - (k+1-i); LG and maximal OG have strict partitions",
    "string": "letter j of the 01..m-string tells in which step the value j first appears",
    "word": "lexicographically first reduced word (i1.i2...) of s_i1 s_i2 ..., Bourbaki numbering",
    "index": "0-based place among all classes by length, then lexicographically",
}


@dataclass(frozen=True, slots=True)
class TableOptions:
    """How a table is written.

    Attributes:
        form: one of ``FORMS``; ``"json"`` means one JSON document per line.
        notation: one of ``notations(X)``; empty for the notation in which classes are printed.
        order: one of ``ORDERS``. In the order ``"blocks"`` the engine computes all products with one u at a time, which is much quicker.
        half: only ``u <= v`` in the order of the classes; the other half follows from commutativity.
    """

    form: str = "csv"
    notation: str = ""
    order: str = "cases"
    half: bool = False


_DEFAULT = TableOptions()


def notations(X: FlagVariety) -> tuple[str, ...]:
    """The notations in which the classes of X can be written in a table."""
    return (*X.notations, "index")


def class_text(u: SchubertClass, notation: str) -> str:
    """A class in one notation, as conjcheck prints and reads it; a string or an index bare.

    >>> u = FlagVariety("Gr(2,4)").schubert(partition=(2, 1))
    >>> [class_text(u, notation) for notation in notations(u.variety)]
    ['[2413]', '(2,1)', '1010', '<1.3.2>', '4']
    """
    match notation:
        case "permutation":
            return f"[{text_of_permutation(u.permutation)}]"
        case "signed":
            return f"[{text_of_signed(u.signed)}]"
        case "partition":
            return f"({','.join(map(str, u.partition))})"
        case "string":
            return u.string
        case "word":
            return f"<{'.'.join(map(str, u.word))}>"
        case _:
            return str(u.index)


def table_lines(X: FlagVariety, options: TableOptions = _DEFAULT) -> Iterator[str]:
    """The lines of the file, with their ends: a head that states every convention, the constants, and a last line with their number.

    Memory does not grow with the table, but for the products with one u in the order ``"blocks"``.

    Raises:
        NotationError: a form, an order or a notation that there is not.
        OutOfReach: no engine covers the space.
    """
    for name, value, known in (
        ("form", options.form, FORMS),
        ("order", options.order, tuple(ORDERS)),
        ("notation", options.notation or notations(X)[0], notations(X)),
    ):
        if value not in known:
            raise NotationError(f"expected {name} to be one of {', '.join(map(repr, known))} on {X}, got {value!r}")
    table(X)  # refuses what is out of reach now, not after the head
    if options.form == "csv":
        return _csv(X, options)
    return _json(X, options) if options.form == "json" else _latex(X, options)


_Products = Iterator[tuple[SchubertClass, SchubertClass, list[tuple[SchubertClass, Degree, int]]]]


def _products(X: FlagVariety, options: TableOptions) -> _Products:
    """The products with their nonzero terms in the order of cases; the order of the products is that of the options."""
    if options.order == "cases":
        for row in rows(X):
            if options.half and row.u.index > row.v.index:
                continue
            terms = row_terms(row.u, row.v)
            yield row.u, row.v, [(w, d, terms[w, d]) for w, d in sorted(terms, key=place_in_row)]
        return
    classes = X.classes
    for block in table(X):
        by_v = np.lexsort((block.w, *block.d.T[::-1], block.d.sum(axis=1), block.v))
        triples = zip(*(array[by_v].tolist() for array in (block.v, block.w, block.d, block.N)), strict=True)
        for v, group in groupby(triples, key=itemgetter(0)):
            if not options.half or block.u.index <= v:
                yield block.u, classes[v], [(classes[w], tuple(d), count) for _, w, d, count in group]


def _head(X: FlagVariety, options: TableOptions) -> dict[str, str | int]:
    """What the reader of the file has to know, without conjcheck at hand."""
    notation = _notation(X, options)
    nodes = ", ".join(f"d{i}" for i in X.marked)
    powers = ", ".join(f"deg q{i} = {degree}" for i, degree in zip(X.marked, X.q_degrees, strict=True))
    pairs = "u <= v in the order of classes; N is symmetric in u and v" if options.half else "all ordered pairs (u, v)"
    return {
        "table": "structure constants N of the quantum cohomology ring: sigma_u * sigma_v = sum of N q^d sigma_w; all others are 0",
        "space": f"{X.name}: type {X.kind}, marked nodes {','.join(map(str, X.marked))} (the simple roots not in the Levi; Bourbaki)",
        "classes": f"{X.number_of_classes:,} classes, in codimension 0 to {X.dim}; sigma_u has codimension l(u)",
        "notation": _CONVENTIONS[notation],
        "degree": f"{nodes}: one entry per marked node; {powers}; l(u) + l(v) = l(w) + sum of d_i deg q_i",
        "pairs": pairs,
        "order": ORDERS[options.order],
        "software": f"conjcheck {own_version()}, engine {engines_for(X)[0].name}",
    }


def _notation(X: FlagVariety, options: TableOptions) -> str:
    """The notation chosen, by default that in which classes are printed."""
    if options.notation:
        return options.notation
    return "partition" if "partition" in X.notations else X.notations[0]


def _csv(X: FlagVariety, options: TableOptions) -> Iterator[str]:
    """Comment lines with ``#``, a line of names, one line per constant, and a comment with their number."""
    for key, words in _head(X, options).items():
        yield f"# {key}: {words}\n"
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    name = _names(X, options)
    count = 0

    def written() -> str:
        text = buffer.getvalue()
        buffer.seek(0)
        buffer.truncate()
        return text

    writer.writerow(["u", "v", "w", *(f"d{i}" for i in X.marked), "N"])
    for u, v, terms in _products(X, options):
        writer.writerows([name(u), name(v), name(w), *d, constant] for w, d, constant in terms)
        count += len(terms)
        yield from written().splitlines(keepends=True)
    yield f"# end: {count} constants\n"


def _json(X: FlagVariety, options: TableOptions) -> Iterator[str]:
    """One JSON object per line: the head, the constants, the end."""
    yield json.dumps({"format": "conjcheck-table", "version": 1, **_head(X, options)}, ensure_ascii=False) + "\n"
    name = _names(X, options)
    count = 0
    for u, v, terms in _products(X, options):
        for w, d, constant in terms:
            yield json.dumps({"u": name(u), "v": name(v), "w": name(w), "d": d, "N": constant}) + "\n"
        count += len(terms)
    yield json.dumps({"end": True, "constants": count}) + "\n"


def _latex(X: FlagVariety, options: TableOptions) -> Iterator[str]:
    """A ``longtable`` with one product per row; needs the packages ``amsmath`` and ``longtable``."""
    for key, words in _head(X, options).items():
        yield f"% {key}: {words}\n"
    name = _names(X, options)
    yield "\\begin{longtable}{@{}lp{0.7\\textwidth}@{}}\n"
    yield f"\\multicolumn{{2}}{{@{{}}l@{{}}}}{{Products in $QH^*({latex_space(X.name)})$}} \\\\\n\\hline\\endhead\n"
    count = 0
    for u, v, terms in _products(X, options):
        right = " $+$ ".join(_term(name(w), d, constant) for w, d, constant in terms)
        yield f"${_sigma(name(u))} * {_sigma(name(v))}$ & $=$ {right or '$0$'} \\\\\n"
        count += len(terms)
    yield "\\end{longtable}\n"
    yield f"% end: {count} constants\n"


def _term(w: str, d: Degree, constant: int) -> str:
    size = "" if constant == 1 else f"{constant}\\,"
    return f"${size}{latex_power(d)}{_sigma(w)}$"


def _sigma(text: str) -> str:
    inner = latex_class(text) if text[0] in "([<" else latex_text(text)
    return f"\\sigma_{{{inner}}}"


def _names(X: FlagVariety, options: TableOptions) -> Callable[[SchubertClass], str]:
    """The name of each class, made once."""
    notation = _notation(X, options)
    found = [class_text(u, notation) for u in X.classes]
    return lambda u: found[u.index]
