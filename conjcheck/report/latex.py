r"""The counterexample of a document as LaTeX, to be pasted into a paper: needs ``amsmath`` and nothing else.

Everything is escaped; the user's own statement is left out, since nobody can promise that it compiles.
"""

from collections.abc import Iterable, Mapping
from typing import Any

from conjcheck.errors import ConjcheckError
from conjcheck.evidence.record import parse_place
from conjcheck.geometry.case import Case
from conjcheck.geometry.typeset import latex_class, latex_polynomial, latex_power, latex_space, latex_text

__all__ = ["latex_page", "latex_snippet"]

_TERMS_PER_LINE = 4
_MOST_TERMS = 40
_LONGEST = 2_000


def latex_snippet(document: Mapping[str, Any]) -> str:
    r"""The counterexample of a document in a paragraph and a display; empty if the document holds no refutation.

    Args:
        document: see ``report.document``.
    """
    failure = document["failure"]
    if not failure or failure["status"] != "refuted":
        return ""
    name = latex_text(_cut(document["name"]))
    lines = [f"\\paragraph{{Counterexample to \\texttt{{{name}}}.}}"]
    try:
        place = parse_place(failure["where"])
    except ConjcheckError:
        lines.append(f"At \\texttt{{{latex_text(_cut(failure['where']))}}}:")
        place = None
    if place is not None:
        X = place.X
        classes = [f"${letter} = {latex_class(str(getattr(place, letter)))}$" for letter in ("u", "v")]
        if isinstance(place, Case):
            classes.append(f"$w = {latex_class(str(place.w))}$")
            if any(place.d):
                classes.append(f"$d = ({','.join(map(str, place.d))})$")
        lines.append(f"On ${latex_space(X.name)}$ let {', '.join(classes[:-1])} and {classes[-1]}.")
    lines.append(_values(failure, document, is_case=isinstance(place, Case)))
    if failure["products"]:
        lines += _products(failure["products"])
    ending = "found with conjcheck" if not document["environment"] else f"found with {document['environment'].split(',')[0]}"
    lines.append(f"({latex_text(_cut(_sentence(failure['minimality'])))}; {latex_text(_cut(ending))}.)")
    return "\n".join(lines) + "\n"


def latex_page(document: Mapping[str, Any]) -> str:
    """The snippet inside the smallest document that compiles."""
    body = latex_snippet(document) or "No counterexample.\n"
    return f"\\documentclass{{article}}\n\\usepackage{{amsmath}}\n\\begin{{document}}\n{body}\\end{{document}}\n"


def _sentence(text: str) -> str:
    return text or "smaller cases not looked at"


def _cut(text: str) -> str:
    return text if len(text) <= _LONGEST else f"{text[:_LONGEST]} ..."


def _values(failure: Mapping[str, Any], document: Mapping[str, Any], *, is_case: bool) -> str:
    symbol = "c_{u,v}^{w}" if document["about"]["ring"] in ("classical", "equivariant") else "N_{u,v}^{w,d}"
    rule, oracle = failure["rule"], failure["oracle"]
    if rule is None:
        true = f", since ${symbol} = {_number(oracle)}$" if oracle is not None and is_case else ""
        return f"The claim is false there{true}."
    return f"The rule gives ${_number(rule)}$, but ${symbol} = {_number(oracle)}$."


def _number(value: int | str | None) -> str:
    return "\\text{unknown}" if value is None else latex_polynomial(_cut(str(value)))


def _products(products: Mapping[str, Any]) -> list[str]:
    """Both products in one display, a few terms on each line."""
    lines: list[str] = []
    for label, side in (("by the rule", products["rule"]), ("by the oracle", products["oracle"])):
        if side is None:
            continue
        terms = [_term(term) for term in side["terms"][:_MOST_TERMS]]
        if len(side["terms"]) + side["more"] > _MOST_TERMS:
            terms.append("\\cdots")
        for k in range(0, max(len(terms), 1), _TERMS_PER_LINE):
            sum_ = " + ".join(terms[k : k + _TERMS_PER_LINE]) or "0"
            head = "\\sigma_u * \\sigma_v &= " if not k else "&\\quad + "
            lines.append(head + sum_ + (f" && \\text{{{label}}}" if not k else ""))
    return ["\\begin{align*}", " \\\\\n".join(lines), "\\end{align*}"] if lines else []


def _term(term: Mapping[str, Any]) -> str:
    count = term["n"]
    size = "" if count == 1 else f"{count}\\," if isinstance(count, int) else f"\\bigl({_number(count)}\\bigr)\\,"
    return " ".join(_filled((size + latex_power(term["d"]), f"\\sigma_{{{latex_class(term['w'])}}}")))


def _filled(parts: Iterable[str]) -> list[str]:
    return [part for part in parts if part]
