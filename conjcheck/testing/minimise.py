"""From any failure to the smallest: descend, then compare everything below in the one order; then the whole layer."""

from dataclasses import dataclass, replace
from time import perf_counter

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import EnginesDisagree, OutOfReach
from conjcheck.geometry.case import Case, Row, rows
from conjcheck.geometry.polynomial import RootPolynomial
from conjcheck.geometry.symmetries import count_orbits, count_row_orbits
from conjcheck.oracle import row_terms, witnesses
from conjcheck.oracle.equivariant import Sampled, equivariant_constant
from conjcheck.testing.compare import Comparer
from conjcheck.testing.finding import Finding
from conjcheck.testing.survey import Coverage, survey
from conjcheck.wording import counted

__all__ = ["Layer", "Minimum", "certified", "confirm", "descend", "layer_of", "minimise"]

_MOST_IN_LAYER = 2_000
_ORBIT_SECONDS = 2.0


@dataclass(frozen=True, slots=True)
class Layer:
    """All failures in the smallest failing space.

    Attributes:
        findings: one per failing case (or failing row of a claim about rows), in order.
        rows: number of rows compared from the smallest failure on; ``complete`` if that was all of them.
        orbits: number of orbits of the failing cases under the symmetries of the space (S3, diagram automorphisms, Seidel), of rows
            under those that act on products; at least so many if not ``all_orbits``.
        size: number of rows of the space.
    """

    findings: tuple[Finding, ...]
    rows: int
    complete: bool
    orbits: int
    all_orbits: bool
    size: int

    @property
    def pairs(self) -> int:
        """Number of failing ordered pairs (u, v)."""
        return len({(f.row.u, f.row.v) for f in self.findings})


@dataclass(frozen=True, slots=True)
class Minimum:
    """The smallest failure known.

    Attributes:
        finding: the failure.
        certified: whether every smaller case of the conjecture's domain was compared and agrees.
        below: how many smaller cases were compared, and agree.
        reach: words for how far the certainty reaches when it is not certified.
    """

    finding: Finding
    certified: bool
    below: int
    reach: str = ""


def descend(comparer: Comparer, finding: Finding, *, budget: float) -> Finding:
    """Walk down inside one space: shorten u or v by one letter, or swap them, while the row still fails."""
    deadline = perf_counter() + budget
    best = finding
    with comparer.limit:
        moving = True
        while moving:
            moving = False
            for row in _neighbours(best.row):
                if perf_counter() > deadline:
                    return best
                found = comparer.row(row, deadline=deadline).finding
                if found and found.status == finding.status:
                    best, moving = found, True
                    break
    return best


def _neighbours(row: Row) -> list[Row]:
    """Smaller rows near by, smallest first."""
    X, u, v = row.X, row.u, row.v

    def below(a: Row) -> bool:
        return a < row

    shorter_u = [w for w in X.of_length(u.length - 1) if _one_letter_less(w.word, u.word)]
    shorter_v = [w for w in X.of_length(v.length - 1) if _one_letter_less(w.word, v.word)]
    near = [Row(X, w, v) for w in shorter_u] + [Row(X, u, w) for w in shorter_v] + [Row(X, v, u)]
    return sorted(filter(below, near), key=lambda a: a.sort_key)


def _one_letter_less(short: tuple[int, ...], word: tuple[int, ...]) -> bool:
    return any(word[:k] + word[k + 1 :] == short for k in range(len(word)))


def minimise(comparer: Comparer, finding: Finding, coverage: Coverage, *, budget: float) -> Minimum:
    """The smallest failure at or below a finding, and whether that is certain.

    Goes on with the survey (``coverage`` is extended in place) up to the row of the finding: what it meets first is the minimum.

    Args:
        comparer: what compares.
        finding: any failure.
        coverage: what has been compared already, from the beginning of the order on.
        budget: seconds.
    """
    deadline = perf_counter() + budget
    row_known, in_row = False, 0
    if finding.status != "too-slow":
        with comparer.limit:
            again = comparer.row(finding.row, deadline=perf_counter() + budget / 4)
        if again.finding:
            finding, row_known, in_row = again.finding, True, again.cases
        elif again.complete:
            finding = Finding("unstable", finding.where, detail=f"{finding.detail or finding.status}, but not when asked again")
    walked = survey(comparer, budget=deadline - perf_counter(), stop_before=finding.row, coverage=coverage)
    if walked.finding:
        smaller = sum(
            space.cases for space in coverage.spaces if not walked.finding.row.X < space.X
        )  # larger ones may be there, too
        return certified(walked.finding, coverage, smaller + walked.in_row)
    if walked.ran_out:
        last = coverage.spaces[-1] if coverage.spaces else None
        where = f"; stopped in {last.X} after {last.rows_seen:,} of {last.X.number_of_classes**2:,} rows" if last else ""
        return Minimum(finding, False, coverage.cases, f"no smaller one among the first {counted(coverage.cases, 'case')}{where}")
    if not row_known:
        reach = f"all {coverage.cases:,} cases of smaller rows agree; its own row was not compared completely"
        return Minimum(finding, False, coverage.cases, reach)
    return certified(finding, coverage, coverage.cases + in_row)


def certified(finding: Finding, coverage: Coverage, below: int) -> Minimum:
    """The minimum, certified unless spaces below it are out of reach."""
    gaps = [X for X in coverage.skipped if X < finding.row.X]
    if not gaps:
        return Minimum(finding, True, below)
    names = ", ".join(X.name for X in gaps[:5]) + (" ..." if len(gaps) > 5 else "")
    return Minimum(finding, False, below, f"all {below:,} smaller cases in reach agree; out of reach of the oracle: {names}")


def layer_of(comparer: Comparer, finding: Finding, *, budget: float) -> Layer:
    """All failures of the same kind in the space of the smallest one, from there on, within a budget."""
    deadline = perf_counter() + budget
    X, seen, complete = finding.row.X, 0, True
    found: list[Finding] = [finding]
    start = finding.row.sort_key
    with comparer.limit:
        for row in rows(X):
            if row.sort_key < start:
                continue
            if perf_counter() > deadline or len(found) >= _MOST_IN_LAYER:
                complete = False
                break
            seen += 1
            differing, whole = comparer.findings(row, deadline=deadline)
            found += [f for f in differing if f.status == finding.status and f.where != finding.where]
            if not whole:
                complete = False
                break
    found.sort(key=lambda f: f.where.sort_key)
    orbits, sorted_out = _orbits(found, comparer.conjecture, max(deadline, perf_counter() + _ORBIT_SECONDS))
    return Layer(tuple(found), seen, complete, orbits, sorted_out, len(X.classes) ** 2)


def _orbits(findings: list[Finding], conjecture: Conjecture, deadline: float) -> tuple[int, bool]:
    """The number of orbits of failing cases and rows, and whether that is all; equivariantly only u and v may be swapped."""
    cases = [f.where for f in findings if isinstance(f.where, Case)]
    whole_rows = [f.where for f in findings if isinstance(f.where, Row)]
    plain, seidel_too = not conjecture.is_equivariant, not (conjecture.is_equivariant or conjecture.is_classical)
    of_rows, all_rows = count_row_orbits(whole_rows, seidel_too=seidel_too, diagrams_too=plain, deadline=deadline)
    if not plain:
        return of_rows + len({frozenset((c, Case(c.X, c.v, c.u, c.w, c.d))) for c in cases}), all_rows
    of_cases, all_cases = count_orbits(cases, seidel_too=seidel_too, deadline=deadline)
    return of_rows + of_cases, all_rows and all_cases


def confirm(finding: Finding) -> tuple[Finding, str]:
    """The finding with the oracle's value witnessed by a second engine or another route, and by which.

    Raises:
        EnginesDisagree: a witness gives another value. Then the oracle is in doubt, not the rule.
    """
    if not isinstance(finding.where, Case):
        row_terms(finding.row.u, finding.row.v, cross_check=True)
        return finding, "the product was computed on two routes"
    ways = witnesses(finding.where)
    if isinstance(finding.oracle, Sampled) or isinstance(finding.rule, RootPolynomial):
        return _confirm_polynomial(finding, finding.where)
    if finding.oracle is None and ways:
        finding = replace(finding, oracle=ways[0][1])
    for how, value in ways:
        if value != finding.oracle:
            raise EnginesDisagree(
                f"expected one constant at {finding.where}, got {finding.oracle} from the oracle and {value} by {how}; the oracle is in "
                "doubt and no verdict of this version can be trusted: please report this"
            )
    return finding, ", ".join(how for how, _ in ways)


def _confirm_polynomial(finding: Finding, case: Case) -> tuple[Finding, str]:
    """The finding with the oracle's polynomial written out, from other points than those of the comparison."""
    try:
        exact = equivariant_constant(case)
    except OutOfReach:
        return (
            finding,
            "no more than the comparison, at two random points modulo two primes: it has too many monomials to be written out",
        )
    if exact == finding.rule or not (finding.oracle or 0) == exact:
        raise EnginesDisagree(f"expected {exact} at {case} to be the constant of the comparison, it is not; the oracle is in doubt")
    return replace(finding, oracle=exact), "interpolation at as many points as it has monomials, and two more modulo another prime"
