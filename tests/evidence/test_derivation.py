"""Derivations for people: every line is true, the chain ends in the oracle's value, and it is short."""

import random
import re

import pytest

from conjcheck import Case, FlagVariety, constant, product
from conjcheck.errors import EnginesDisagree, NotIndependent, OutOfReach
from conjcheck.evidence.derivation import derivation
from conjcheck.geometry.case import parse_class
from conjcheck.oracle.chevalley import chevalley
from conjcheck.oracle.guard import Watch, watched

TERM = re.compile(r"(?:(\d+) )?(?:q\^\(([\d,]+)\) )?(?:sigma(\S+)|(1))")
PART = re.compile(
    r"(?P<sign>[-+]) (?:(?P<divisor>D\d+|\([^)]*D[^)]*\))(?: \* sigma(?P<z>\S+))?|(?P<term>(?:\d+ )?(?:q\^\S+ )?(?:sigma\S+|1)))"
)


def terms_of(text, X, zero):
    """A sum of terms as written, ``{(w, d): count}``."""
    found = {}
    for term in text.split(" + ") if text != "0" else ():
        count, d, name, _ = TERM.fullmatch(term).groups()
        key = (parse_class(X, name) if name else X.identity, tuple(map(int, d.split(","))) if d else zero)
        assert key not in found
        found[key] = int(count or 1)
    return found


def times_divisor(text, u):
    """A combination of divisors such as ``(D2 - 2 D1)`` times a class, by the oracle's products."""
    X, total = u.variety, {}
    body = text.strip("()")
    pieces = re.findall(r"([-+]?) ?(?:(\d+) )?D(\d+)", body)
    assert len(pieces) == body.count("D")
    for sign, size, node in pieces:
        for key, count in product(X.schubert(word=(int(node),)), u).items():
            total[key] = total.get(key, 0) + (-1 if sign == "-" else 1) * int(size or 1) * count
    return total


def check(case, chain):
    """Every line of a chain, read back and held against the oracle's products; the number of steps."""
    X, lines = chain.space, list(chain.lines)
    top = case.d
    if X is not case.X:
        goal = re.fullmatch(
            rf"lifted to {re.escape(str(X))} \(.*\): N is the coefficient of (.*) in sigma(\S+) \* sigma(\S+)", lines.pop(0)
        )
        ((w, top),) = terms_of(goal[1], X, (0,) * len(X.marked))
        u, v = parse_class(X, goal[2]), parse_class(X, goal[3])
        assert (u.word, v.word) == (case.u.word, case.v.word)
    else:
        w, u, v = case.w, case.u, case.v
    inside = lambda d: all(a <= b for a, b in zip(d, top, strict=True))  # noqa: E731
    zero = (0,) * len(X.marked)
    assert product(u, v).get((w, top), 0) == constant(case.u, case.v, case.w, case.d)
    if lines[0].startswith("divisors"):
        head = lines.pop(0)
        for node, name in re.findall(r"D(\d+) = sigma([^\s,;]+|\([^)]*\))", head):
            assert parse_class(X, name).word == (int(node),)
        assert f"q^({','.join(map(str, top))})" in head if any(top) else head.endswith("modulo q")
    steps = 0
    for line in lines[:-1]:
        if line.endswith("is the unit, so the product is " + repr(v if u is X.identity else u)):
            continue
        if re.fullmatch(r"\.\.\. \d+ more steps are left out", line):
            assert not chain.complete
            continue
        left, right = line.split(", so ")
        expressed, how = left.split(" = ")
        times, _, name, _ = TERM.fullmatch(expressed).groups()
        x, total, read = parse_class(X, name), {}, ""
        for part in PART.finditer(f"+ {how}"):
            read += part[0] + " "
            sign = 1 if part["sign"] == "+" else -1
            terms = (
                times_divisor(part["divisor"], parse_class(X, part["z"]) if part["z"] else X.identity)
                if part["divisor"]
                else terms_of(part["term"], X, zero)
            )
            for key, count in terms.items():
                total[key] = total.get(key, 0) + sign * count
        assert read == f"+ {how} "
        assert {key: n for key, n in total.items() if n and inside(key[1])} == {(x, zero): int(times or 1)}
        head, shown = right.split(" = ")
        a, b = re.fullmatch(r"sigma(\S+) \* sigma(\S+)", head).groups()
        assert parse_class(X, a) is x
        assert parse_class(X, b) in (u, v)
        truth = {key: n for key, n in product(x, parse_class(X, b)).items() if inside(key[1])}
        rest = re.search(r"(?:(.*) \+ )?(\d+) terms? that do(?:es)? not enter", shown)
        if rest:
            kept = terms_of(rest[1] or "0", X, zero)
            assert len(truth) == len(kept) + int(rest[2])
            assert kept.items() <= truth.items()
        else:
            assert terms_of(shown, X, zero) == truth
        steps += 1
    value = constant(case.u, case.v, case.w, case.d)
    assert lines[-1].startswith(f"so N = {value}{', the coefficient of ' if value else ': '}")
    return steps


SPACES = [
    "Fl(4)",
    "Fl(5)",
    "Gr(1,4)",
    "Gr(2,4)",
    "Gr(2,5)",
    "Fl(1,3;4)",
    "Fl(1,2,4;5)",
    "B2/B",
    "B2/P1",
    "OG(2,5)",
    "C3/B",
    "LG(3,6)",
]
SPACES += ["IG(2,6)", "B3/B", "Q^5", "G2/B", "G2/P1", "G2/P2", "D4/B", "Q^6"]


@pytest.mark.parametrize("name", SPACES)
def test_every_line_is_true(name):
    """On spaces of all kinds, at constants drawn at random, each line read back is an identity of the ring; N is the oracle's."""
    X, rng = FlagVariety(name), random.Random(f"derivations {name}")
    for _ in range(4):
        u, v = rng.choice(X.classes), rng.choice(X.classes)
        (w, d), _ = rng.choice(list(product(u, v).items()))
        case = Case(X, u, v, rng.choice(X.of_length(w.length)), d)
        check(case, derivation(case, most_lines=100))


def test_in_full():
    """The chain of the lantern rule's counterexample, word for word: over Fl(5), since sigma(1) alone does not reach sigma(2)."""
    chain = derivation(Case.parse("Gr(3,5): (2) * (2,1) -> (), q^(1)"))
    assert chain.lines == (
        "lifted to Fl(5) (Peterson, Woodward): N is the coefficient of q^(0,0,1,0) sigma[23154] in sigma[12534] * sigma[13524]",
        "divisors: D3 = sigma[12435], D4 = sigma[12354]; powers of q that do not divide q^(0,0,1,0) are left out",
        "sigma[12354] = D4, so sigma[12354] * sigma[13524] = sigma[13542] + sigma[14523]",
        "sigma[12534] = (D3 - D4) * sigma[12354], so sigma[12534] * sigma[13524] = "
        "sigma[24513] + q^(0,0,1,0) sigma[13452] + q^(0,0,1,0) sigma[14253]",
        "so N = 0: q^(0,0,1,0) sigma[23154] does not occur",
    )
    assert (chain.complete, chain.edges, chain.space) == (True, (), FlagVariety("Fl(5)"))


def test_on_the_space_itself_where_that_suffices():
    """On projective space, and on a quadric, the divisor reaches every class needed: no lift."""
    for text in ("Gr(1,4): (3) * (3) -> (2), q^(1)", "Fl(1,3;4): [2143] * [3142] -> [4123], q^(0,0)"):
        case = Case.parse(text)
        chain = derivation(case)
        assert chain.space is case.X
        assert not chain.lines[0].startswith("lifted")


@pytest.mark.parametrize(
    "text",
    ["Gr(1,4): (3) * (3) -> (2), q^(1)", "Fl(3): [321] * [312] -> [213], q^(1,1)", "G2/B: <1.2.1> * <2.1.2> -> <1.2>, q^(1,1)"],
)
def test_edges_are_chevalley_terms(text):
    """Each edge is a term of the Chevalley formula; they lead from a factor to the class asked for."""
    case = Case.parse(text)
    chain = derivation(case)
    assert chain.edges
    for (x, d), (y, e) in chain.edges:
        moves = [
            (target, tuple(a + b for a, b in zip(d, power, strict=True))) for target, power, _ in chevalley(chain.space).terms(x)
        ]
        assert (y, e) in moves
    ends = {end for edge in chain.edges for end in edge}
    zero = (0,) * len(case.d)
    assert (case.w.index, case.d) in ends
    assert {(case.u.index, zero), (case.v.index, zero)} & ends


def test_long_chains_are_cut():
    """A chain longer than allowed is cut before its last line, and says how many steps are missing."""
    case = Case.parse("G2/B: <1.2.1.2.1.2> * <1.2.1.2.1.2> -> <1.2>, q^(2,3)")
    whole, cut = derivation(case, most_lines=100), derivation(case, most_lines=6)
    assert whole.complete
    assert not cut.complete
    assert len(cut.lines) == 6
    assert cut.lines[:4] == whole.lines[:4]
    assert cut.lines[4] == f"... {len(whole.lines) - 5} more steps are left out"
    assert cut.lines[5] == whole.lines[-1] == "so N = 2, the coefficient of q^(2,3) sigma<1.2>"
    assert check(case, whole) == len(whole.lines) - 2
    assert cut.edges == whole.edges


def test_the_degree_axiom():
    """Where lengths and degrees do not add up that is the reason."""
    chain = derivation(Case.parse("Gr(2,4): (1) * (1) -> (2), q^(1)"))
    assert chain.lines == ("N = 0 by degrees: l(u) + l(v) = 2, l(w) + deg q^d = 6",)


def test_the_unit():
    """A product with the unit needs no step."""
    chain = derivation(Case.parse("Gr(2,4): () * (2,1) -> (2,1)"))
    assert chain.lines == ("sigma() is the unit, so the product is sigma(2,1)", "so N = 1, the coefficient of sigma(2,1)")


def test_out_of_reach():
    """Where the divisors of G/P do not suffice and G/B is too large there is no chain."""
    with pytest.raises(OutOfReach, match="E6/B is too large for one"):
        derivation(Case.parse("E6/P1: <2.5.4.3.1> * <2.5.4.3.1> -> <1.3.5.4.2.6.5.4.3.1>, q^(0)"))


def test_another_value_is_an_alarm(monkeypatch):
    """If the chain ends in another value than the oracle's, that is no derivation but a disagreement."""
    monkeypatch.setattr("conjcheck.evidence.derivation.constant", lambda u, v, w, d: 5)
    with pytest.raises(EnginesDisagree, match="expected 5 at Gr"):
        derivation(Case.parse("Gr(2,4): (1) * (1) -> (2)"))


def test_a_rule_may_not_ask():
    """A rule that derives constants asks the oracle."""
    with pytest.raises(NotIndependent), watched(Watch()):
        derivation(Case.parse("Gr(2,4): (1) * (1) -> (2)"))
