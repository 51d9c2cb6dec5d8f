"""Which spaces make up a whole family up to some n, so that a long list can be said in a few words without saying more than it holds."""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from conjcheck.geometry import families
from conjcheck.geometry.families import Family
from conjcheck.geometry.flag_variety import FlagVariety

__all__ = ["Run", "runs"]

_FEWEST = 3
_LAST_RANK_OF_ALL = 5
_MOST_STEPS = 6


@dataclass(frozen=True, slots=True)
class Run:
    """All members of a family in a range of ranks.

    Attributes:
        words: the family, in the plural.
        shape: the shape of its members, as plain text and LaTeX; empty if the words say it.
        variable: ``"n"``, or ``"rank"``.
        first, last: the range of that variable.
        from_start: whether the family has no member below.
        members: the spaces.
    """

    words: str
    shape: tuple[str, str] | tuple[()]
    variable: str
    first: int
    last: int
    from_start: bool
    members: frozenset[FlagVariety]


@dataclass(frozen=True, slots=True)
class _Kind:
    """A family that can be named; ``shift`` is what is added to the rank to get the variable."""

    words: str
    shape: tuple[str, str] | tuple[()]
    make: Callable[[], Family]
    variable: str = "n"
    shift: int = 0
    last_rank: int = 40


_COUNTED = ("", "", "two", "three", "four", "five", "six")


def _stepped(m: int) -> _Kind:
    steps = ",".join(f"k{i}" for i in range(1, m + 1))
    latex = ",".join(f"k_{{{i}}}" for i in range(1, m + 1))
    shape = (f"Fl({steps};n)", f"\\mathrm{{Fl}}({latex};n)")
    return _Kind(f"{_COUNTED[m]}-step flag varieties", shape, lambda: families.StepFlags(m), shift=1, last_rank=12)


_KINDS = (
    _Kind(
        "varieties", ("G/P, G simple,", "G/P, G \\text{ simple},"), families.HomogeneousSpaces, "rank", last_rank=_LAST_RANK_OF_ALL
    ),
    _Kind(
        "partial flag varieties, Grassmannians and complete flag varieties among them,",
        ("Fl(k1,...,km;n)", "\\mathrm{Fl}(k_{1},\\dots,k_{m};n)"),
        families.PartialFlags,
        shift=1,
        last_rank=10,
    ),
    _Kind("complete flag varieties", ("Fl(n)", "\\mathrm{Fl}(n)"), families.CompleteFlags, shift=1),
    _Kind("Grassmannians", ("Gr(k,n)", "\\mathrm{Gr}(k,n)"), families.Grassmannians, shift=1),
    *(_stepped(m) for m in range(2, _MOST_STEPS + 1)),
    _Kind("projective spaces", ("P^(n-1) = Gr(1,n)", "\\mathbb{P}^{n-1} = \\mathrm{Gr}(1,n)"), families.ProjectiveSpaces, shift=1),
    _Kind("Lagrangian Grassmannians", ("LG(n,2n)", "\\mathrm{LG}(n,2n)"), families.LagrangianGrassmannians),
    _Kind(
        "maximal orthogonal Grassmannians",
        (
            "OG(n,2n+1) (n >= 2) and OG(n,2n) (n >= 4)",
            "\\mathrm{OG}(n,2n+1)\\ (n \\ge 2) \\text{ and } \\mathrm{OG}(n,2n)\\ (n \\ge 4)",
        ),
        families.OrthogonalGrassmannians,
    ),
    _Kind(
        "isotropic Grassmannians",
        ("B_r/P_k, C_r/P_k, D_r/P_k", "B_r/P_k, C_r/P_k, D_r/P_k"),
        families.IsotropicGrassmannians,
        "rank",
    ),
    _Kind("cominuscule varieties", (), families.Cominuscule, "rank"),
    _Kind("minuscule varieties", (), families.Minuscule, "rank"),
    _Kind("adjoint varieties", (), families.Adjoint, "rank"),
    _Kind(
        "complete flag varieties",
        ("G/B", "G/B"),
        lambda: families.CompleteFlags("ABCDEFG"),
        "rank",
    ),
)


def runs(spaces: Iterable[FlagVariety]) -> list[Run | FlagVariety]:
    """The spaces as whole families as far as possible, the largest first, then those left over, one by one in order.

    A run is taken only if every member of its family in its range is among the spaces; two spaces or fewer are listed by name.
    """
    all_of_them = frozenset(spaces)
    left, found = set(all_of_them), list[Run | FlagVariety]()
    candidates = [run for kind in _KINDS for run in _runs_of(kind, all_of_them)] if all_of_them else []
    while True:
        best = max(candidates, key=lambda run: len(run.members & left), default=None)
        if best is None or len(best.members & left) < _FEWEST:
            return [*found, *sorted(left)]
        found.append(best)
        left -= best.members


def _runs_of(kind: _Kind, spaces: frozenset[FlagVariety]) -> Iterator[Run]:
    """The longest ranges of ranks in which every member of a family is among the spaces."""
    family, started = kind.make(), False
    ranks: list[int] = []
    members: set[FlagVariety] = set()

    def run(from_start: bool) -> Run:
        bounds = ranks[0] + kind.shift, ranks[-1] + kind.shift
        return Run(kind.words, kind.shape, kind.variable, *bounds, from_start, frozenset(members))

    from_start = True
    for rank in range(1, min(max(X.rank for X in spaces), kind.last_rank) + 1):
        level = set(family.of_rank(rank))
        if not level:
            continue  # no member of this rank: none is missed
        if level <= spaces:
            from_start = from_start if ranks else not started
            ranks.append(rank)
            members |= level
        elif ranks:
            yield run(from_start)
            ranks, members = [], set()
        started = True
    if ranks:
        yield run(from_start)
