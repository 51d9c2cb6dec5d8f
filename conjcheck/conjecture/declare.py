"""``@candidate`` and ``@claim``: a plain function becomes a frozen ``Conjecture`` value, validated when declared."""

import functools
import inspect
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from itertools import product
from math import prod
from types import CodeType, MappingProxyType
from typing import Any

from conjcheck.errors import DeclarationError
from conjcheck.geometry.families import Family

__all__ = ["Conjecture", "candidate", "claim"]

Rule = Callable[..., Any]

_RINGS = ("quantum", "classical", "equivariant quantum", "equivariant")
_ODD_KINDS = (inspect.Parameter.KEYWORD_ONLY, inspect.Parameter.VAR_POSITIONAL, inspect.Parameter.VAR_KEYWORD)


@dataclass(frozen=True, eq=False)
class Conjecture:
    """One conjecture; still an ordinary function: calling it calls the rule.

    Attributes:
        name: the name of the function, or the name in its module if that is another one.
        rule: the function as written.
        role: ``"candidate"`` (a formula for constants) or ``"claim"`` (a statement about them).
        by_rows: whether one call answers a whole row ``(X, u, v)`` instead of one case.
        on: the family of flag varieties it speaks about.
        ring: ``"quantum"``; ``"classical"``: then degrees drop out of all signatures and only ``d = 0`` is compared; or
            ``"equivariant quantum"`` and ``"equivariant"``: the same, with polynomials in the simple roots instead of counts.
        premise: the hypothesis, ``None`` for none; ``premise_by_rows`` tells which signature it has.
        statement: in LaTeX.
        references, contributors: for the report and for the citation.
        features: the user's own features of cases, by their names in reports, for the diagnosis of failures.
        variants: open choices of the rule: for each keyword argument its values, the first being the rule as it stands.
        choice: the values chosen, one per keyword argument.
    """

    name: str
    rule: Rule
    role: str
    by_rows: bool
    on: Family
    ring: str
    premise: Rule | None
    premise_by_rows: bool
    statement: str
    references: tuple[str, ...]
    contributors: tuple[str, ...]
    features: Mapping[str, Rule] = field(default_factory=dict)
    variants: Mapping[str, tuple[Any, ...]] = field(default_factory=dict)
    choice: Mapping[str, Any] = field(default_factory=dict)

    def __call__(self, *args: Any, **kwargs: Any) -> Any:
        """The rule itself."""
        return self.rule(*args, **kwargs)

    def variant(self, **choice: Any) -> "Conjecture":
        """The same conjecture with some of its open choices made otherwise.

        Raises:
            DeclarationError: an argument that is no open choice, or a value that is not among its values.
        """
        for name, value in choice.items():
            if name not in self.variants or value not in self.variants[name]:
                offered = ", ".join(f"{key}={values!r}" for key, values in self.variants.items()) or "no open choices"
                raise DeclarationError(f"expected a choice among those of {self.name} ({offered}), got {name}={value!r}")
        chosen = {**self.choice, **choice}
        written = self.rule
        while isinstance(written, functools.partial):  # a choice made before
            written = written.func
        rule = functools.wraps(written)(functools.partial(written, **chosen))
        return _with_page(replace(self, rule=rule, choice=MappingProxyType(chosen)))

    def all_variants(self) -> Iterator["Conjecture"]:
        """Every combination of the open choices, in the order of the declaration, the rule as it stands first."""
        for values in product(*self.variants.values()):
            yield self.variant(**dict(zip(self.variants, values, strict=True)))

    def about(self) -> dict[str, Any]:
        """What it says of itself, in JSON types, for reports."""
        return {
            "role": self.role,
            "ring": self.ring,
            "family": str(self.on),
            "premise": self.premise is not None,
            "statement": self.statement,
            "description": inspect.getdoc(inspect.unwrap(self.rule)) or "",
            "references": list(self.references),
            "contributors": list(self.contributors),
            "choice": {name: repr(value) for name, value in self.choice.items()},
        }

    @property
    def choice_in_words(self) -> str:
        """The choice as it would be written in a call, ``strict=True, drop=1``; empty without variants."""
        return ", ".join(f"{name}={value!r}" for name, value in self.choice.items())

    @property
    def number_of_variants(self) -> int:
        """How many combinations of the open choices there are; 1 without any."""
        return prod(map(len, self.variants.values()))

    @property
    def file(self) -> str:
        """The file it was written in."""
        return inspect.getsourcefile(inspect.unwrap(self.rule)) or "<unknown>"

    @property
    def line(self) -> int:
        """The line, 1-based, where it begins there."""
        code: CodeType = inspect.unwrap(self.rule).__code__
        return code.co_firstlineno

    @property
    def is_classical(self) -> bool:
        """Whether only ``d = 0`` is compared."""
        return self.ring in ("classical", "equivariant")

    @property
    def is_equivariant(self) -> bool:
        """Whether the values are polynomials in the simple roots."""
        return self.ring.startswith("equivariant")

    def called(self, name: str) -> "Conjecture":
        """The same conjecture under another name: that of the variable that holds it."""
        return self if name == self.name else _with_page(replace(self, name=name))

    def __repr__(self) -> str:
        return f"<{self.role} {self.name} on {self.on}>"


def candidate(
    *misplaced: Any,
    on: Family | None = None,
    premise: Rule | None = None,
    statement: str = "",
    references: Sequence[str] = (),
    contributors: Sequence[str] = (),
    ring: str = "quantum",
    features: Mapping[str, Rule] | None = None,
    variants: Mapping[str, Sequence[Any]] | None = None,
) -> Callable[[Rule], Conjecture]:
    """Declare a candidate formula for the structure constants ``N_{u,v}^{w,d}``.

    The decorated function has one of these signatures, by these names:

    * ``(X, u, v, w, d)``: one constant, an ``int`` of 0 or more, or an iterable of distinct hashable objects, which are counted;
    * ``(X, u, v)``: the whole product, a mapping from ``(w, d)`` to such a value; what it leaves out is 0;
    * with ``ring="classical"``: ``(X, u, v, w)``, or ``(X, u, v)`` with a mapping from ``w``.

    ``X`` is a ``FlagVariety``, ``u, v, w`` its ``SchubertClass`` es, ``d`` a tuple with one entry per marked node.

    Args:
        on: the family the rule speaks about, e.g. ``Grassmannians()``.
        premise: the hypothesis, a predicate ``(X, u, v)`` on rows (cheap: prefer it) or ``(X, u, v, w, d)`` on cases; cases
            outside it are not compared.
        statement: the formula in LaTeX, for reports.
        references: where it is published, one string each.
        contributors: who proposes it.
        ring: ``"quantum"``, ``"classical"``, ``"equivariant quantum"`` or ``"equivariant"``. In the equivariant rings a value is a
            polynomial in the simple roots: one made from ``simple_roots(X)``, an ``int``, or a sympy expression in ``alpha1, ...``.
        features: your own features of cases, ``{"in words": function of (X, u, v, w, d)}``, each giving a ``bool``, an ``int`` or a
            ``str``: what the diagnosis of failures looks at besides its own.
        variants: open choices, ``{"argument": (values, ...)}``: the function takes them as keyword-only arguments. pytest examines the
            rule with the first values; ``conjcheck sift`` compares all combinations.

    Raises:
        DeclarationError: the message names file, line, argument and remedy.
    """
    if misplaced:
        raise DeclarationError(
            f"expected @candidate(on=...) with named arguments, got {misplaced[0]!r}; write @candidate(on=Grassmannians())"
        )
    return functools.partial(
        _declare, "candidate", on, premise, statement, references, contributors, ring, features or {}, variants or {}
    )


def claim(
    *misplaced: Any,
    on: Family | None = None,
    premise: Rule | None = None,
    statement: str = "",
    references: Sequence[str] = (),
    contributors: Sequence[str] = (),
    ring: str = "quantum",
    features: Mapping[str, Rule] | None = None,
) -> Callable[[Rule], Conjecture]:
    """Declare a statement about constants, with the oracle at hand.

    The decorated function returns a ``bool``, whether the statement holds, and has one of these signatures:

    * ``(X, u, v, w, d, N)``: ``N(u, v, w, d)`` is the true constant (another variety's classes may be asked about too);
    * ``(X, u, v, N)``: a statement about a whole product; ``N.product(u, v)`` is the true product, ``{(w, d): int}``;
    * with ``ring="classical"``: ``(X, u, v, w, N)`` and ``N(u, v, w)``; ``(X, u, v, N)`` and ``N.product(u, v)``, ``{w: int}``.

    The other arguments are those of :func:`candidate`.
    """
    if misplaced:
        raise DeclarationError(
            f"expected @claim(on=...) with named arguments, got {misplaced[0]!r}; write @claim(on=Grassmannians())"
        )
    return functools.partial(_declare, "claim", on, premise, statement, references, contributors, ring, features or {}, {})


def _declare(
    role: str,
    on: Family | None,
    premise: Rule | None,
    statement: str,
    references: Sequence[str],
    contributors: Sequence[str],
    ring: str,
    features: Mapping[str, Rule],
    variants: Mapping[str, Sequence[Any]],
    rule: Rule,
) -> Conjecture:
    """Validate and build."""
    if not inspect.isfunction(rule):
        raise DeclarationError(f"expected a plain function under @{role}, got {rule!r}; put @{role}(on=...) directly above a def")
    inner = inspect.unwrap(rule)
    place = f"{inspect.getsourcefile(inner) or '<unknown>'}:{inner.__code__.co_firstlineno}: @{role} {rule.__name__}"
    if not isinstance(on, Family):
        raise DeclarationError(f"{place}: expected a family for on, got on={on!r}; write on=Grassmannians() or on=Varieties(X)")
    if ring not in _RINGS:
        raise DeclarationError(f"{place}: expected ring to be one of {', '.join(map(repr, _RINGS))}, got ring={ring!r}")
    if not isinstance(statement, str):
        raise DeclarationError(f"{place}: expected a str in LaTeX for statement, got statement={statement!r}")
    for name, value in (("references", references), ("contributors", contributors)):
        if not isinstance(value, (list, tuple)) or not all(isinstance(entry, str) for entry in value):
            raise DeclarationError(f"{place}: expected a list of strings for {name}, got {name}={value!r}; write {name}=[...]")
    if inspect.isgeneratorfunction(premise) or (premise is not None and not callable(premise)):
        raise DeclarationError(f"{place}: expected a function that returns a bool for premise, got premise={premise!r}")
    _check_features(place, features)
    _check_variants(place, rule, variants)
    tail = () if ring in ("classical", "equivariant") else ("d",)
    whole, single = ("X", "u", "v"), ("X", "u", "v", "w", *tail)
    oracle = ("N",) if role == "claim" else ()
    by_rows = _signature(place, "the rule", rule, (*single, *oracle), (*whole, *oracle), tuple(variants))
    premise_by_rows = premise is None or _signature(place, "the premise", premise, single, whole)
    if role == "claim" and ring.startswith("equivariant"):
        raise DeclarationError(f"{place}: expected ring='quantum' or 'classical' for a claim, got ring={ring!r}")
    if role == "claim" and by_rows and not premise_by_rows:
        raise DeclarationError(
            f"{place}: expected a premise on rows, with the arguments ({', '.join(whole)}), since the claim is about rows, got one on cases"
        )
    made = _with_page(
        Conjecture(
            rule.__name__,
            rule,
            role,
            by_rows,
            on,
            ring,
            premise,
            premise_by_rows,
            statement,
            tuple(references),
            tuple(contributors),
            MappingProxyType(dict(features)),
            MappingProxyType({name: tuple(values) for name, values in variants.items()}),
        )
    )
    return next(made.all_variants()) if variants else made


def _check_features(place: str, features: Mapping[str, Rule]) -> None:
    if not isinstance(features, Mapping) or not all(isinstance(name, str) and callable(f) for name, f in features.items()):
        raise DeclarationError(f'{place}: expected features={{"in words": function of (X, u, v, w, d)}}, got features={features!r}')


def _check_variants(place: str, rule: Rule, variants: Mapping[str, Sequence[Any]]) -> None:
    """Every open choice is a keyword-only argument of the rule, with at least one value."""
    if not isinstance(variants, Mapping) or not all(isinstance(values, (list, tuple)) and values for values in variants.values()):
        raise DeclarationError(f'{place}: expected variants={{"argument": (values, ...)}}, got variants={variants!r}')
    for name, values in variants.items():
        if any(value in values[:k] for k, value in enumerate(values)):
            raise DeclarationError(f"{place}: expected different values for {name} in variants, got {name}={values!r}")
    missing = [n for n in variants if n not in (p := inspect.signature(rule).parameters) or p[n].kind is not p[n].KEYWORD_ONLY]
    if missing:
        raise DeclarationError(
            f"{place}: expected a keyword-only argument for each of the variants, got none for {', '.join(map(str, missing))}; "
            f"write def {rule.__name__}(..., *, {', '.join(map(str, missing))})"
        )


def _with_page(made: Conjecture) -> Conjecture:
    """Give a conjecture the page of its function, so that ``help`` and doctests find it."""
    vars(made).update(__doc__=made.rule.__doc__, __name__=made.name, __wrapped__=made.rule)
    return made


def _signature(
    place: str, what: str, function: Rule, single: tuple[str, ...], whole: tuple[str, ...], choices: tuple[str, ...] = ()
) -> bool:
    """Whether the function has the row signature; an error unless it has one of the two."""
    try:
        parameters = inspect.signature(function).parameters
    except (TypeError, ValueError):
        raise DeclarationError(
            f"{place}: expected a Python function for {what}, got {function!r}; write a def or a lambda"
        ) from None
    names = tuple(f"*{name}" if p.kind in _ODD_KINDS else name for name, p in parameters.items() if name not in choices)
    if names not in (single, whole):
        hint = ""
        if set(names) - set(single) == {"d"}:
            hint = "; in the classical rings there is no d"
        elif set(single) - set(names) == {"d"}:
            hint = "; for a rule without d declare ring='classical'"
        raise DeclarationError(
            f"{place}: expected the arguments ({', '.join(single)}) or ({', '.join(whole)}) for {what}, "
            f"got ({', '.join(names)}){hint}"
        )
    return names == whole
