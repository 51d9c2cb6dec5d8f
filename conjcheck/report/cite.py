"""Words for a paper, from a record: exactly what was compared, in plain text or LaTeX, and how to cite the software."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Protocol

from conjcheck.evidence.entries import FEWEST_ROWS, Counterexample, Covered, Sample, failure_bound, own_version, refuting
from conjcheck.evidence.record import Record
from conjcheck.geometry.case import Case
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.geometry.typeset import latex_class, latex_polynomial, latex_power, latex_space, latex_text
from conjcheck.report.runs import Run, runs

__all__ = ["LATEX", "PLAIN", "SOFTWARE", "Software", "Style", "bibtex", "citation"]


@dataclass(frozen=True, slots=True)
class Software:
    """What to cite; ``CITATION.cff`` says the same."""

    title: str
    author: str
    abstract: str
    released: str
    licence: str


SOFTWARE = Software(
    title="conjcheck",
    author="The conjcheck developers",
    abstract="Tests candidate positive rules for the structure constants of the quantum cohomology of flag varieties against an exact, "
    "independent oracle, and shrinks failures to certified minimal counterexamples.",
    released="2026-12-01",
    licence="BSD-3-Clause",
)


class Style(Protocol):
    """How names, classes and values are written: as plain text or as LaTeX."""

    def text(self, words: str) -> str:
        """Words that may hold any character."""

    def name(self, name: str) -> str:
        """The name of a conjecture, a file, or the beginning of a hash."""

    def space(self, X: FlagVariety) -> str:
        """A space."""

    def formula(self, plain: str, latex: str) -> str:
        """A formula of ours, in both forms."""

    def place(self, found: Counterexample) -> str:
        """Where a counterexample is, with the preposition."""

    def value(self, value: int | str) -> str:
        """A count or a polynomial."""


class _Plain:
    """Plain text, as conjcheck prints and reads it."""

    def text(self, words: str) -> str:
        return words

    def name(self, name: str) -> str:
        return name

    def space(self, X: FlagVariety) -> str:
        return X.name

    def formula(self, plain: str, latex: str) -> str:
        return plain

    def place(self, found: Counterexample) -> str:
        return f"at {found.where}"

    def value(self, value: int | str) -> str:
        return str(value)


class _Latex:
    """LaTeX that needs ``amsmath`` and nothing else."""

    def text(self, words: str) -> str:
        return latex_text(words)

    def name(self, name: str) -> str:
        return f"\\texttt{{{latex_text(name)}}}"

    def space(self, X: FlagVariety) -> str:
        return f"${latex_space(X.name)}$"

    def formula(self, plain: str, latex: str) -> str:
        return f"${latex}$"

    def place(self, found: Counterexample) -> str:
        where = found.where
        factors = f"the product $\\sigma_{{{latex_class(str(where.u))}}} * \\sigma_{{{latex_class(str(where.v))}}}$"
        if isinstance(where, Case):
            term = f"{latex_power(where.d)} \\sigma_{{{latex_class(str(where.w))}}}".strip()
            return f"for the coefficient of ${term}$ in {factors} on {self.space(where.X)}"
        return f"for {factors} on {self.space(where.X)}"

    def value(self, value: int | str) -> str:
        return f"${latex_polynomial(str(value))}$"


PLAIN: Style = _Plain()
LATEX: Style = _Latex()

_RINGS = {
    "quantum": ("the structure constants of the quantum cohomology ring", "QH*(X)", "QH^*(X)"),
    "classical": ("the structure constants of the cohomology ring", "H*(X)", "H^*(X)"),
    "equivariant quantum": ("the structure constants of the equivariant quantum cohomology ring", "QH*_T(X)", "QH^*_T(X)"),
    "equivariant": ("the structure constants of the equivariant cohomology ring", "H*_T(X)", "H^*_T(X)"),
}


def citation(record: Record, style: Style = PLAIN) -> str:
    """What a record says, in sentences that can stand in a paper; never more than was compared.

    Spaces are named as a family only where every member of the family is covered; the others are listed.
    """
    complete = [c for c in record.coverage if c.complete and not c.failing]
    partial = [c for c in record.coverage if not c.complete and not c.failing]
    wrong = [c for c in record.coverage if c.failing]
    sentences = [_coverage(record, complete, partial, style)] if complete or partial else []
    sentences += [_failing(c, style) for c in wrong]
    sentences += [_sample(s, record, style) for s in record.samples]
    name = style.name(record.conjecture)
    wrong_now = refuting(record.counterexamples, record.rule, None)
    if record.status == "refuted":
        heads = [f"The conjecture {name} is false" if not sentences else "It is false", *["It is also false"] * len(wrong_now)]
        sentences += [_counterexample(head, c, style) for head, c in zip(heads, wrong_now, strict=False)]
    elif wrong_now:
        sentences.append(f"The record calls {name} open, although it holds {_number(len(wrong_now), 'counterexample')}.")
    called = f" {name}" if not sentences else ""
    sentences += [_earlier(c, called, style) for c in record.counterexamples if c not in wrong_now]
    if not sentences:
        return f"Nothing is on record as compared for the conjecture {name}."
    if record.coverage or record.samples:
        versions = sorted({c.conjcheck for c in record.coverage} | {s.conjcheck for s in record.samples})
        made_by = style.text(_listed([f"conjcheck {version}" for version in versions]))
        short = style.name((record.rule or "").removeprefix("sha256:")[:12])
        sentences.append(f"Computed by {made_by} for the version of the rule whose SHA-256 begins with {short}.")
    return " ".join(sentences)


def bibtex() -> str:
    """The software as a BibTeX entry, with the version that is running."""
    fields = {
        "author": f"{{{latex_text(SOFTWARE.author)}}}",
        "title": f"{{{latex_text(SOFTWARE.title)}}}",
        "year": SOFTWARE.released[:4],
        "note": latex_text(f"Software, version {own_version()}, {SOFTWARE.licence}"),
        "abstract": latex_text(SOFTWARE.abstract),
    }
    body = ",\n".join(f"  {key} = {{{value}}}" for key, value in fields.items()).replace("-{}", "-")
    return f"@misc{{{SOFTWARE.title},\n{body}\n}}\n"


def _coverage(record: Record, complete: Sequence[Covered], partial: Sequence[Covered], style: Style) -> str:
    """What was compared in order and agrees."""
    scope = [f"completely on {_listed(_spaces([c.X for c in complete], style))}"] if complete else []
    if partial:
        parts = [f"the first {c.seen:,} of {c.of:,} pairs of {style.space(c.X)}" for c in partial]
        scope.append(f"{'on' if complete else 'as far as'} {_listed(parts)}, in the order of conjcheck")
    entries = [*complete, *partial]
    rows, cases, nonzero = (sum(getattr(c, key) for c in entries) for key in ("rows", "cases", "nonzero"))
    return (
        f"The conjecture {style.name(record.conjecture)} was compared with {_constants(record, style)}: {', and '.join(scope)}; "
        f"{_cases(record)}, zeros included. They agree there: {_number(rows, 'product')}, {_number(cases, 'case')}, "
        f"{_number(nonzero, 'nonzero constant')}."
    )


def _failing(entry: Covered, style: Style) -> str:
    how_far = "" if entry.complete else f"the first {entry.seen:,} of {entry.of:,} pairs of "
    return (
        f"On {how_far}{style.space(entry.X)} it fails at {_number(entry.failing, 'case')}; {_number(entry.cases, 'case')} in "
        f"{_number(entry.rows, 'product')} were compared there."
    )


def _sample(sample: Sample, record: Record, style: Style) -> str:
    """What rows drawn at random say, and how little that is."""
    inside = {True: " inside its premise", False: "", None: " inside its premise, if it has one"}[record.premise]
    what = f"{_number(sample.rows, 'product')}{inside} drawn at random ({style.text(sample.how)}; seed {sample.seed})"
    verdict = "none of them wrong" if not sample.failing else f"and it fails at {_number(sample.failing, 'product')}"
    drawn = f"On {style.space(sample.X)}, {what} were compared: {_number(sample.cases, 'case')}, {verdict}"
    if sample.rows < FEWEST_ROWS:
        return f"{drawn}; too few for a bound on the failures."
    share, level = failure_bound(sample.rows, sample.failing), style.text("95 %")
    if share == "1":
        return f"{drawn}."
    return f"{drawn}; at confidence {level} the share of such products that fail, weighted as they are drawn, is at most {share}."


def _counterexample(head: str, found: Counterexample, style: Style) -> str:
    """What is wrong, where, and how it is known."""
    place = style.place(found)
    if found.rule is not None and found.oracle is not None:
        words = f"the rule gives {style.value(found.rule)} instead of {style.value(found.oracle)}"
    elif found.oracle is not None:
        words = f"the statement is false, and the constant is {style.value(found.oracle)}"
    else:
        words = "the statement is false"
    minimal = "; this is the smallest counterexample: all smaller cases were compared and agree" if found.minimal else ""
    proof = f"; certificate {style.name(found.certificate)}" if found.certificate else ""
    if found.instead:
        proof = f"; {style.text(found.instead)}"
    return f"{head}: {place} {words}{minimal}{proof}."


def _earlier(found: Counterexample, called: str, style: Style) -> str:
    """A counterexample that says nothing about the version of the rule on record."""
    if found.rule_hash is None:
        return f"A version of the rule{called} that the record does not name was refuted {style.place(found)}."
    short = style.name(found.rule_hash.removeprefix("sha256:")[:12])
    return (
        f"An earlier version of the rule{called} was refuted {style.place(found)}; the SHA-256 of that version begins with {short}."
    )


def _cases(record: Record) -> str:
    return {
        True: "every case inside its premise",
        False: "every case",
        None: "every case inside its premise, if it has one",
    }[record.premise]


def _constants(record: Record, style: Style) -> str:
    if record.ring not in _RINGS:
        return "the structure constants"
    words, plain, latex = _RINGS[record.ring]
    return f"{words} {style.formula(plain, latex)}"


def _spaces(spaces: Iterable[FlagVariety], style: Style) -> list[str]:
    """Complete families in words, then what is left, one by one."""
    return [_run(found, style) if isinstance(found, Run) else style.space(found) for found in runs(spaces)]


def _run(run: Run, style: Style) -> str:
    """``all Grassmannians Gr(k,n) with n <= 7``."""
    shape = f" {style.formula(*run.shape)}" if run.shape else ""
    if run.variable == "rank":
        bounds = f"of rank {run.first}" if run.first == run.last else f"of rank {run.first} to {run.last}"
        return f"all {run.words}{shape} {'of rank at most ' + str(run.last) if run.from_start and run.first < run.last else bounds}"
    if run.first == run.last:
        bounds = style.formula(f"{run.variable} = {run.last}", f"{run.variable} = {run.last}")
    elif run.from_start:
        bounds = style.formula(f"{run.variable} <= {run.last}", f"{run.variable} \\le {run.last}")
    else:
        bounds = style.formula(f"{run.first} <= {run.variable} <= {run.last}", f"{run.first} \\le {run.variable} \\le {run.last}")
    return f"all {run.words}{shape} with {bounds}"


def _number(count: int, what: str) -> str:
    return f"{count:,} {what}{'' if count == 1 else 's'}"


def _listed(parts: Sequence[str]) -> str:
    return parts[0] if len(parts) == 1 else f"{', '.join(parts[:-1])} and {parts[-1]}"
