"""The oracle: one call for a constant, a product, a table; the engine is chosen by what covers the variety.

Engines share the geometry of ``conjcheck.geometry`` and nothing else:

* ``"recursion"``: every flag variety of type A up to n = 8, by associativity and the quantum Chevalley formula on complete flags,
  then Peterson-Woodward comparison;
* ``"vafa-intriligator"``: Grassmannians with up to 1,000 classes, by a closed formula;
* ``"localisation"``: any G/P with up to 1,000 classes, by equivariant localisation; slow where there are many q's.
"""

from collections.abc import Iterator

from conjcheck.errors import DifferentVarieties, EnginesDisagree, NotationError, OutOfReach
from conjcheck.geometry.case import Case, read_degree
from conjcheck.geometry.flag_variety import Degree, FlagVariety, SchubertClass
from conjcheck.oracle.comparison import RecursionEngine
from conjcheck.oracle.engine import Block, Engine, Product, RowTerms
from conjcheck.oracle.grassmannian import VafaIntriligatorEngine
from conjcheck.oracle.guard import note_question
from conjcheck.oracle.localisation import Localisation, LocalisationEngine

__all__ = ["ENGINES", "Block", "Product", "constant", "engines_for", "product", "row_terms", "table", "witnesses"]


_RECURSION = RecursionEngine()
_LOCALISATION = LocalisationEngine()

ENGINES: dict[str, Engine] = {engine.name: engine for engine in (VafaIntriligatorEngine(), _RECURSION, _LOCALISATION)}
"""All engines by name, the preferred one first."""

_CHEAP_WORK = 100_000_000


def engines_for(X: FlagVariety) -> list[Engine]:
    """The engines that cover X, the preferred one first.

    With one q localisation is quicker than the detour through G/B.
    """
    found = [engine for engine in ENGINES.values() if engine.refuses(X) is None]
    if len(X.marked) == 1 and found and found[0] is _RECURSION and _LOCALISATION in found:
        found.reverse()
    return found


def _chosen(X: FlagVariety, name: str | None) -> Engine:
    if name is not None:
        if name not in ENGINES:
            raise NotationError(f"expected engine to be one of {', '.join(map(repr, ENGINES))}, got engine={name!r}")
        if reason := ENGINES[name].refuses(X):
            raise OutOfReach(f"expected a variety in reach of engine {name!r}, but {reason}; leave engine= out to choose another")
        return ENGINES[name]
    covering = engines_for(X)
    if not covering:
        reasons = "; ".join(f"{engine.name}: {engine.refuses(X)}" for engine in ENGINES.values())
        raise OutOfReach(f"expected a variety in reach of some engine, got {X} ({reasons})")
    return covering[0]


def _one_variety(u: SchubertClass, *others: SchubertClass) -> FlagVariety:
    if not isinstance(u, SchubertClass):
        raise NotationError(f"expected a Schubert class, got {u!r}; make one with X.schubert(...)")
    for other in others:
        if not isinstance(other, SchubertClass):
            raise NotationError(f"expected a Schubert class, got {other!r}; make one with X.schubert(...)")
        if other.variety is not u.variety:
            raise DifferentVarieties(f"expected classes of one variety, got {u!r} of {u.variety} and {other!r} of {other.variety}")
    return u.variety


def row_terms(u: SchubertClass, v: SchubertClass, *, engine: str | None = None, cross_check: bool = False) -> RowTerms:
    """The nonzero terms of ``sigma_u * sigma_v`` as a plain dictionary in no particular order: what the harness uses.

    With ``cross_check`` a second engine must agree, or where there is only one, the same engine on its direct route.
    """
    note_question()
    X = u.variety
    first = _chosen(X, engine)
    terms = first.row(u, v)
    if cross_check:
        second, name = _second(first, u, v)
        if terms != second:
            raise EnginesDisagree(
                f"expected one product {X}: {u} * {v} from two engines, got {Product.of(terms)} from {first.name} and "
                f"{Product.of(second)} from {name}; please report this, no verdict of this version can be trusted"
            )
    return terms


def _second(first: Engine, u: SchubertClass, v: SchubertClass) -> tuple[RowTerms, str]:
    """A product by another engine than the first, the cheapest one; where that is too slow, by the recursion on its direct route."""
    X = u.variety
    for other in engines_for(X):
        if other is not first and (other is not _LOCALISATION or _LOCALISATION.work(X, u.length + v.length) <= _CHEAP_WORK):
            return other.row(u, v), other.name
    return _RECURSION.direct_row(u, v), "recursion, direct route"


def product(u: SchubertClass, v: SchubertClass, *, engine: str | None = None, cross_check: bool = False) -> Product:
    """Quantum product of two Schubert classes.

    Returns the nonzero structure constants of ``sigma_u * sigma_v`` in QH*(X), keyed by ``(w, d)``: ``w`` a class of the same variety
    (minimal representative, codimension ``w.length``), ``d`` a tuple with one entry per marked node, in Bourbaki order. Every
    value is a positive integer, exact.

    Args:
        u, v: classes of one flag variety.
        engine: the name of one engine; the default chooses.
        cross_check: compute the product twice, by two engines or on two routes, and raise ``EnginesDisagree`` if they differ.

    Cost: one row; ``Fl(6)`` takes about 0.2 ms, ``Fl(7)`` about 2 ms, ``Fl(8)`` 0.1 s, ``Gr(5,10)`` 0.3 ms, after a set-up of
    well under a second.

    Raises:
        DifferentVarieties: ``u`` and ``v`` live on different varieties; the message names both.
        OutOfReach: no engine covers the variety; the message says why for each.

    >>> from conjcheck.geometry.flag_variety import Gr
    >>> X = Gr(2, 4)
    >>> product(X.schubert(partition=(2, 1)), X.schubert(partition=(2, 1)))
    q^(1) sigma(2) + q^(1) sigma(1,1)

    Source: see the engines, ``conjcheck.oracle.recursion`` and ``conjcheck.oracle.grassmannian``.
    """
    _one_variety(u, v)
    return Product.of(row_terms(u, v, engine=engine, cross_check=cross_check))


def constant(u: SchubertClass, v: SchubertClass, w: SchubertClass, d: Degree | None = None, *, engine: str | None = None) -> int:
    """One structure constant ``N_{u,v}^{w,d}``; without ``d`` the classical one.

    >>> from conjcheck.geometry.flag_variety import Fl
    >>> X = Fl(3)
    >>> s1, s12 = X.schubert(word=(1,)), X.schubert(word=(1, 2))
    >>> constant(s1, X.point, s12, (1, 0)), constant(s1, s1, X.identity, (0, 1))
    (1, 0)

    Arguments, errors and sources are those of :func:`product`.
    """
    X = _one_variety(u, v, w)
    note_question()
    return _chosen(X, engine).constant(u, v, w, read_degree(X, (0,) * len(X.marked) if d is None else d))


def table(X: FlagVariety, *, engine: str | None = None) -> Iterator[Block]:
    """All nonzero structure constants of X, streamed: one ``Block`` of arrays per u, so memory does not grow with the table.

    The order of the blocks is the engine's; every u occurs once.

    >>> from conjcheck.geometry.flag_variety import Fl
    >>> sum(len(block) for block in table(Fl(4)))
    1168
    """
    if not isinstance(X, FlagVariety):
        raise NotationError(f"expected a flag variety, got {X!r}; make one with FlagVariety('Fl(4)')")
    note_question()
    return _chosen(X, engine).blocks(X)


def witnesses(case: Case) -> list[tuple[str, int]]:
    """The constant of a case by every other way there is: ``(how, value)``, the strongest first.

    The other engines that cover the variety, as far as they are quick; the direct route of the recursion; and law 2,
    ``N_{u,v}^{w,d} = N_{u, w^vee}^{v^vee, d} = N_{v, w^vee}^{u^vee, d}``, through another product; where localisation is alone and that is
    the same product, localisation again, at other numbers.
    """
    note_question()
    X, d = case.X, case.d
    chosen = _chosen(X, None)
    weight = case.u.length + case.v.length - case.w.length
    found = [
        (f"engine {other.name}", other.constant(case.u, case.v, case.w, d))
        for other in engines_for(X)
        if other is not chosen and (other is not _LOCALISATION or _LOCALISATION.work(X, weight) <= _CHEAP_WORK)
    ]
    if _RECURSION.refuses(X) is None:
        found.append(("the recursion without symmetries", _RECURSION.direct_row(case.u, case.v).get((case.w, d), 0)))
    for u, v in ((case.u, case.v), (case.v, case.u)):
        if case.w.dual is not v:  # otherwise it would be the same question
            found.append(("S3-symmetry", chosen.constant(u, case.w.dual, v.dual, d)))
            break
    if not found and chosen is _LOCALISATION and _LOCALISATION.work(X, weight) <= _CHEAP_WORK:
        again = Localisation(X)
        again.seed = 1
        found.append(("localisation at other numbers", again.constant(case.u, case.v, case.w, d)))
    return found
