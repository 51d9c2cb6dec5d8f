"""Records to draw, as they could be: parts of one true survey per space, so that any two of them are compatible."""

from functools import cache

from hypothesis import strategies as st

from conjcheck import Case, FlagVariety, Row
from conjcheck.evidence.record import Counterexample, Covered, Record, Sample
from conjcheck.geometry.case import rows

HASH = "sha256:" + "0123456789abcdef" * 4
OTHER_HASH = "sha256:" + "f" * 64
SPACES = tuple(map(FlagVariety, ("Gr(1,3)", "Gr(2,4)", "Fl(3)", "LG(2,4)", "E6/P1")))
NAMES = st.sampled_from(["", "x", "recursion", "0.1.0", "0.2.0", "ä \"'\\ \n"])
CASES = (
    "Gr(1,3): (1) * (1) -> (2), q^(0)",
    "Gr(2,4): (1) * (2,1) -> (), q^(1)",
    "Gr(2,4): (2,1) * (2,1) -> (2), q^(1)",
    "Fl(3): [132] * [321] -> [132], q^(1,0)",
)
PLACES = (*map(Case.parse, CASES), Row.parse("Fl(3): [321] * [321]"))
FAILING = {place if isinstance(place, Row) else place.row for place in PLACES}


@cache
def numbers_after(X, seen):
    """What an imagined rule has in the first rows of a space: rows inside its premise, cases, nonzero, failing."""
    first = list(zip(range(seen), rows(X), strict=False))
    inside = [k for k, row in first if (row.u.index + row.v.index) % 3 or row in FAILING]
    failing = sum(k % 17 == 16 for k in inside) + sum(row in FAILING for _, row in first)
    return len(inside), sum(1 + k % 4 for k in inside), sum(k % 2 for k in inside), failing


@st.composite
def covereds(draw):
    """How far a space was compared."""
    X = draw(st.sampled_from(SPACES))
    of = X.number_of_classes**2
    seen = draw(st.integers(0, of) | st.just(of))
    inside, cases, nonzero, failing = numbers_after(X, seen)
    seconds = draw(st.sampled_from([0.0, 0.25, 1.0, 17.125]))
    return Covered(X, inside, seen, cases, nonzero, failing, seconds, draw(NAMES) or "e", draw(NAMES) or "0")


@st.composite
def samples(draw):
    """A sample: cases and failures follow from space, seed and rows."""
    X, seed, rows = draw(st.sampled_from(SPACES)), draw(st.integers(-2, 2)), draw(st.integers(0, 40))
    how = draw(st.sampled_from(["rows drawn uniformly, with repetition", "drawn otherwise"]))
    return Sample(X, how, seed, rows, rows * 3, rows * (seed % 3) // 7, draw(NAMES) or "0")


@st.composite
def counterexamples(draw):
    """A counterexample; its values follow from its place, and only the smallest of all is ever called minimal."""
    k = draw(st.integers(0, len(PLACES) - 1))
    proof = draw(st.sampled_from([(None, None), ("a.json", None), ("b.1.json", None), (None, "words"), (None, "other words")]))
    rule, oracle = draw(st.sampled_from([(None, None), (k, None), (None, f"{k} alpha1"), (k, f"{k} alpha1")]))
    return Counterexample(PLACES[k], rule, oracle, k == 0 and draw(st.booleans()), *proof, draw(st.sampled_from([None, HASH])))


@st.composite
def records(draw):
    """A record of the conjecture ``my_rule``; any two drawn can be merged."""
    found = draw(st.lists(counterexamples(), max_size=4))
    status = draw(st.sampled_from(["open", "refuted"])) if found else "open"
    coverage, sampled = draw(st.lists(covereds(), max_size=4)), draw(st.lists(samples(), max_size=4))
    return Record(
        "my_rule",
        status,
        tuple(found),
        statement=draw(st.sampled_from(["", r"h^n = q \text{ ü}"])),
        ring=draw(st.sampled_from(["", "quantum"])),
        premise=draw(st.sampled_from([None, True])),
        rule=HASH if coverage or sampled else draw(st.sampled_from([None, HASH])),
        coverage=tuple(coverage),
        samples=tuple(sampled),
        file=draw(st.sampled_from([None, "rules.py"])),
    )
