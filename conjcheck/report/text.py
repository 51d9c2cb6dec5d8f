"""The outcome in plain text: verdict first, then everything needed to believe it and to go on."""

import shlex
import textwrap
from collections.abc import Mapping, Sequence
from pathlib import PurePath
from typing import Any

from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import SchubertClass
from conjcheck.geometry.notation import text_of_permutation
from conjcheck.oracle.engine import Product
from conjcheck.oracle.equivariant import Sampled
from conjcheck.report.document import verdict_of
from conjcheck.testing.answer import shown_value
from conjcheck.testing.diagnosis import Diagnosis
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import Layer
from conjcheck.testing.outcome import Outcome, environment, smaller_agree
from conjcheck.wording import aligned, counted

__all__ = ["describe_class", "replay_line", "summary_table", "text_report"]

_WIDTH = 110
_LABEL = 13
_MOST_LINES = 8
_MOST_TERMS = 30


def text_report(outcome: Outcome, *, replay: str = "") -> str:
    """The whole report of one outcome.

    Args:
        outcome: what was found.
        replay: the command that repeats the part, without the case; the case is added.
    """
    finding = outcome.finding
    lines = [outcome.verdict, ""]
    if outcome.note:
        lines += _entry("note", outcome.note)
    if outcome.conjecture.statement:
        lines += _entry("statement", outcome.conjecture.statement)
    if outcome.conjecture.choice:
        others = outcome.conjecture.number_of_variants - 1
        lines += _entry("choice", f"{outcome.conjecture.choice_in_words}; {counted(others, 'other variant')}")
    if finding is None:
        lines += _entry("compared", outcome.scope)
    else:
        lines += _failure(outcome, finding)
        if replay:
            lines += _entry("replay", replay_line(replay, finding), wrap=False)
        if outcome.cases or outcome.minimum:
            extra = outcome.minimum.below - outcome.cases if outcome.minimum else 0
            lines += _entry("compared", outcome.scope + (f"; and {extra:,} more in the failing row" if extra > 0 else ""))
    lines += _entry("environment", environment() + (f"; seed {outcome.seed}" if outcome.seed else ""))
    return "\n".join(lines)


def replay_line(command: str, finding: Finding) -> str:
    """The command that repeats exactly the case of a finding."""
    return f"{command} --conjcheck-case {shlex.quote(str(finding.where))}"


def _failure(outcome: Outcome, finding: Finding) -> list[str]:
    """The lines about a failure."""
    where = finding.where
    lines = _entry("case" if isinstance(where, Case) else "row", str(where), wrap=False)
    for name in ("u", "v", "w") if isinstance(where, Case) else ("u", "v"):
        lines += _entry("", f"{name} = {describe_class(getattr(where, name))}", wrap=False)
    if outcome.broken_law:
        lines += _entry("law", f"broken without any oracle: {outcome.broken_law}")
    if finding.status != "refuted":
        lines += _entry("problem", finding.detail)
        lines += _entry("remedy", outcome.remedy)
        if finding.trace:
            lines += ["", *("    " + line for line in finding.trace.rstrip().splitlines()), ""]
        return lines + _entry("minimal", _minimality(outcome))
    if finding.rule is not None:
        lines += _entry("rule", shown_value(finding.rule))
        if finding.objects is not None:
            lines += _entry("objects", "; ".join(finding.objects) or "none")
    if finding.oracle is not None:
        confirmed = (
            f"confirmed by {outcome.confirmed_by}" if outcome.confirmed_by else "by one engine: no other way is in reach there"
        )
        lines += _entry("oracle", f"{finding.oracle}, {confirmed}")
    else:
        lines += _entry("confirmed", outcome.confirmed_by)
    if outcome.explanation:
        lines += _entry("kind", ", ".join(outcome.explanation.kinds) or finding.detail)
        asked = ", asked only where the oracle is not 0" if outcome.explanation.partial else ""
        sides = [(f"by the rule{asked}", outcome.explanation.by_rule), ("by the oracle", outcome.explanation.by_oracle)]
        shown = [f"{side}: {_product(product, finding.where)}" for side, product in sides if product is not None]
        for label, text in zip(["product", ""], shown, strict=False):
            lines += _entry(label, text)
    derived = outcome.derivation.lines if outcome.derivation else ()
    if not derived and isinstance(finding.where, Case) and not outcome.conjecture.is_equivariant:
        derived = ("no short chain of Chevalley products was found; a certificate, where there is one, has all the steps",)
    for place, text in enumerate(derived):
        lines += _entry("" if place else "why", text)
    lines += _entry("minimal", _minimality(outcome))
    if outcome.layer:
        lines += _layer(outcome.layer, finding.row)
    if outcome.diagnosis:
        lines += _diagnosis(outcome.diagnosis, where)
    return lines


def _minimality(outcome: Outcome) -> str:
    minimum = outcome.minimum
    if minimum is None:
        return "not looked at: only this case was compared"
    if minimum.certified:
        return f"yes: {smaller_agree(minimum.below, 'were compared and agree')}"
    return f"not certain: {minimum.reach}"


def _layer(layer: Layer, row: Row) -> list[str]:
    """The failures of the whole smallest space."""
    pairs = counted(layer.pairs, "failing ordered pair (u, v)", "failing ordered pairs (u, v)")
    cases, single = len(layer.findings), any(isinstance(finding.where, Case) for finding in layer.findings)
    what = counted(cases, "failing case" if single else "failing row")
    least = "" if layer.all_orbits else "at least "
    orbits = f"{least}{counted(layer.orbits, 'orbit')} under the symmetries of {row.X}"
    if layer.complete:
        text = f"{pairs} among the {layer.size:,} of {row.X}: {what} in {orbits}"
    else:
        text = f"at least {pairs} of {row.X}: {what} in {orbits} among {counted(layer.rows, 'row')}"
    lines = _entry("layer", text)
    for finding in layer.findings[:_MOST_LINES]:
        values = f": rule {shown_value(finding.rule)}, oracle {_oracle_value(finding)}" if finding.rule is not None else ""
        lines += _entry("", str(finding.where).removeprefix(f"{row.X}: ") + values, wrap=False)
    if cases > _MOST_LINES:
        lines += _entry("", f"... {cases - _MOST_LINES:,} more")
    return lines


def _diagnosis(diagnosis: Diagnosis, where: Case | Row) -> list[str]:
    """What all failures have in common, and where the rule may be right."""
    lines = _entry("errors", "; ".join(diagnosis.signs)) if diagnosis.signs else []
    other = [f"smallest failure with {words}: {case}" for words, case in diagnosis.firsts if case != where]
    for place, text in enumerate(other):
        lines += _entry("" if place or lines else "errors", text)
    lines += _entry("failures", diagnosis.scope)
    for condition in diagnosis.conditions:
        same = f" (the same at these cases: {'; '.join(condition.others)})" if condition.others else ""
        lines += _entry("", f"{condition.words}{same}: {diagnosis.counts(condition)}")
    for text in diagnosis.unusable:
        lines += _entry("", f"your feature could not be used: {text}")
    lines += _entry("suggestion", diagnosis.suggested)
    if diagnosis.suggestion and diagnosis.suggestion.premise:
        lines += _entry("", diagnosis.suggestion.premise, wrap=False)
    return lines


def _oracle_value(finding: Finding) -> str:
    return "another polynomial" if isinstance(finding.oracle, Sampled) else str(finding.oracle)


def describe_class(u: SchubertClass) -> str:
    """A class in all its notations.

    >>> from conjcheck.geometry.flag_variety import Gr
    >>> describe_class(Gr(2, 4).schubert(partition=(2,)))
    '(2)  permutation 1423, string 0110, word 3.2, length 2'
    """
    X, views = u.variety, []
    if X.kind.letter == "A":
        if X.is_grassmannian:
            views.append(f"permutation {text_of_permutation(u.permutation)}")
        views.append(f"string {u.string}")
    elif X.kind.letter in "BCD" and not str(u).startswith("["):
        views.append(f"signed {'.'.join(map(str, u.signed))}")
    if not str(u).startswith("<"):
        views.append(f"word {'.'.join(map(str, u.word)) or 'empty'}")
    return f"{u}  {', '.join([*views, f'length {u.length}'])}"


def _product(product: Product, where: Case | Row) -> str:
    """A product, its first terms and the one that is asked about if it is long."""
    if len(product) <= _MOST_TERMS:
        return str(product)
    terms = list(product.items())
    key = (where.w, where.d) if isinstance(where, Case) else None
    first, asked = Product(terms[:_MOST_TERMS]), [term for term in terms[_MOST_TERMS:] if term[0] == key]
    shown = " + ... + ".join(map(str, (first, *([Product(asked)] if asked else []))))
    return f"{shown} + ... ({len(product) - _MOST_TERMS - len(asked)} more terms)"


def _entry(label: str, text: str, *, wrap: bool = True) -> list[str]:
    """One labelled entry, wrapped and indented."""
    indent = " " * _LABEL
    if not wrap:
        return [f"{label:<{_LABEL}}{text}"]
    return textwrap.wrap(
        text, _WIDTH, initial_indent=f"{label:<{_LABEL}}", subsequent_indent=indent, break_long_words=False, break_on_hyphens=False
    ) or [label]


def summary_table(outcomes: list[dict[str, Any]], broken: Sequence[Mapping[str, str]] = ()) -> list[str]:
    """The table at the end of a run: one line per conjecture, from the JSON forms of the outcomes of its parts.

    What could not even be collected, a ``file`` and its ``problem``, has a line without numbers.

    Rows, cases and nonzero constants are those of the survey; ``drawn`` counts the rows of the probes.
    """
    by_name: dict[tuple[str, str], list[dict[str, Any]]] = {}
    for outcome in outcomes:
        by_name.setdefault((outcome["file"], outcome["conjecture"]), []).append(outcome)
    names = [name for _, name in by_name]
    table = [("conjecture", "status", "rows", "cases", "nonzero", "drawn", "seconds", "compared, or where it fails")]
    for (file, plain), parts in by_name.items():
        name = plain if names.count(plain) == 1 else f"{plain} ({PurePath(file).parent.name}/{PurePath(file).name})"
        shown = verdict_of(parts)
        drawn = sum(part["rows"] for part in parts if part["part"].startswith("probe"))
        numbers = [shown["rows"], shown["cases"], shown["nonzero"], drawn]
        where = shown["where"]
        if "rule" in shown:
            where += " (minimal)" if shown["minimal"] else " (not known to be minimal)"
        if shown.get("note"):
            where += f"; {shown['note']}"
        seconds = sum(part["seconds"] for part in parts)
        table.append((name, shown["status"], *(f"{number:,}" for number in numbers), f"{seconds:.1f}", where))
    for item in broken:
        why = (item["problem"].strip().splitlines() or [""])[-1].strip()
        why = textwrap.shorten(why, _WIDTH, placeholder=" ...") or "unknown problem"
        table.append((PurePath(item["file"]).name, "no verdict", "", "", "", "", "", f"cannot be used: {why}"))
    return ["  ".join(cells) for cells in aligned(table, right=range(2, len(table[0]) - 1))]
