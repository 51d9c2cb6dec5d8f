"""Certificates: every constant in reach gets one, the checker accepts it, and it says what the oracle says."""

import json
import random
from pathlib import Path

import pytest

from conjcheck import Case, FlagVariety, Row, constant, product, recheck
from conjcheck.errors import NotIndependent, OutOfReach
from conjcheck.evidence.certificate import certificate_of, write_certificate
from conjcheck.geometry.polynomial import simple_roots
from conjcheck.oracle.guard import Watch, watched

RECORDS = Path(__file__).parents[2] / "conjectures" / "records"
ABOUT = {"conjecture_name": "my_rule", "rule_hash": "sha256:" + "a" * 64}
PLACES = [
    entry["where"]
    for path in sorted(RECORDS.glob("*.json"))
    if not path.name.endswith(".certificate.json")
    for entry in json.loads(path.read_text(encoding="utf-8"))["counterexamples"]
]


def certify(text, **changes):
    """A certificate for a case."""
    return certificate_of(Case.parse(text), **{"rule_value": 5, **ABOUT, **changes})


def test_there_are_counterexamples_on_record():
    """The bundled refuted rules give cases, whole rows, and one whose G/B is beyond the recursion."""
    assert len(PLACES) >= 6
    assert sum("->" in text for text in PLACES) >= 4
    assert any(text.startswith("E6/P1") for text in PLACES)


@pytest.mark.parametrize("text", [text for text in PLACES if "->" in text])
def test_counterexamples_on_record(text):
    """The counterexample of a bundled refuted rule has a certificate, with the oracle's value, which the checker accepts."""
    case, found = Case.parse(text), certify(text)
    assert found["claim"]["text"] == text
    assert found["claim"]["value"] == constant(case.u, case.v, case.w, case.d)
    assert recheck.check(found).startswith(f"N = {found['claim']['value']} at {text} ")


@pytest.mark.parametrize("text", [text for text in PLACES if "->" not in text])
def test_rows_have_none(text):
    """A claim about a whole product has no certificate, and the message says so."""
    with pytest.raises(OutOfReach, match="a claim about products has no certificate"):
        certificate_of(Row.parse(text), rule_value=None, **ABOUT)


SPACES = ["Fl(3)", "Fl(4)", "Fl(5)", "Gr(2,4)", "Gr(3,6)", "Gr(1,5)", "Fl(1,3;4)", "Fl(2,3;5)", "Fl(1,2,4;5)", "B2/B"]
SPACES += ["B2/P1", "OG(2,5)", "C2/P1", "C3/B", "LG(3,6)", "IG(2,6)", "C3/P1,3", "B3/B", "OG(3,7)", "Q^5"]
SPACES += ["G2/B", "G2/P1", "G2/P2", "D4/B", "Q^6", "OG(4,8)", "OG(2,8)", "D4/P1,3", "F4/P4"]


@pytest.mark.parametrize("name", SPACES)
def test_the_oracle_is_certified(name):
    """On spaces of all kinds, constants drawn at random, zeros and positive ones, have certificates with the oracle's value."""
    X, rng = FlagVariety(name), random.Random(f"certificates {name}")
    for _ in range(3):
        u, v = rng.choice(X.classes), rng.choice(X.classes)
        terms = product(u, v)
        (w, d), count = rng.choice(list(terms.items()))
        found = certificate_of(Case(X, u, v, w, d), rule_value=None, **ABOUT)
        assert found["claim"]["value"] == count
        recheck.check(found)
        zero = next(((x, d) for x in X.of_length(w.length) if (x, d) not in terms), None)
        if zero:
            found = certificate_of(Case(X, u, v, *zero), rule_value=1, **ABOUT)
            assert found["claim"]["value"] == 0
            recheck.check(found)


def test_short():
    """A certificate is short: two steps for the lantern rule, and a line of the file for each step."""
    found = certify("Gr(3,5): (2) * (2,1) -> (), q^(1)")
    assert found["steps"] == [
        {"class": [4], "times": 1, "from": [{"divisor": [0, 0, 0, 1], "class": []}], "minus": []},
        {"class": [4, 3], "times": 1, "from": [{"divisor": [0, 0, 1, -1], "class": [4]}], "minus": []},
    ]


def test_the_unit():
    """A product with the unit takes no step."""
    found = certify("Gr(2,4): () * (2,1) -> (2,1)")
    assert (found["steps"], found["claim"]["value"]) == ([], 1)


def test_the_degree_axiom():
    """Where lengths and degrees do not add up the constant is 0, and that has a certificate as well."""
    found = certify("Fl(4): [2143] * [3241] -> [4123], q^(3,0,1)")
    assert found["claim"]["value"] == 0


def test_the_other_factor_is_expanded_where_that_is_shorter():
    """u or v is expanded, whichever takes fewer steps."""
    long, short = "[54321]", "[21345]"
    assert certify(f"Fl(5): {short} * {long} -> [14325], q^(1,1,1,1)")["expand"] == "u"
    found = certify(f"Fl(5): {long} * {short} -> [14325], q^(1,1,1,1)")
    assert (found["expand"], len(found["steps"]), found["claim"]["value"]) == ("v", 1, 1)


def test_large_n():
    """In type A there is a certificate beyond the complete flag varieties that the recursion reaches."""
    found = certify("Gr(2,12): (3,1) * (2,2) -> (5,3)")
    assert found["claim"]["value"] == 1
    assert found["claim"]["rank"] == 11


def test_sums_of_products():
    """On D4 some classes need a sum of several products: such a step is written and accepted."""
    found = certify("D4/B: [-1.2.3.-4] * [3.1.4.2] -> [1.3.-2.-4], q^(0,1,1,1)")
    assert max(len(step["from"]) for step in found["steps"]) > 1


def test_out_of_reach():
    """There is no certificate where the group is too large, the ring is equivariant, or the value has no place; the message says why."""
    with pytest.raises(OutOfReach, match=r"expected a rank of at most 12 for a certificate in type A, got Gr\(1,20\)"):
        certify("Gr(1,20): (1) * (1) -> (2)")
    with pytest.raises(OutOfReach, match="certificates hold numbers only"):
        certify("Gr(1,3): (1) * (1) -> (2)", ring="equivariant quantum")
    with pytest.raises(OutOfReach, match="certificates hold numbers only"):
        certify("Gr(1,3): (1) * (1) -> (1)", rule_value=simple_roots(FlagVariety("Gr(1,3)"))[0])
    with pytest.raises(OutOfReach, match=r"expected an integer from 0 to .* as rule.value"):
        certify("Gr(1,3): (1) * (1) -> (2)", rule_value=10**50)


def test_bounds(monkeypatch):
    """A derivation that is too long for the checker, in steps, in work or in bytes, gives no certificate; the message says which."""
    text = "Gr(3,6): (3,2,1) * (3,2,1) -> (2,1), q^(1)"
    with monkeypatch.context() as patch:
        patch.setattr(recheck, "MOST_WORK", 1_000)
        with pytest.raises(
            OutOfReach, match="expanding u in 12 steps: expected a derivation that takes at most 1,000 units of work"
        ):
            certify(text)
    with monkeypatch.context() as patch:
        patch.setattr(recheck, "MOST_STEPS", 11)
        with pytest.raises(OutOfReach, match="expanding u: expected at most 11 steps, got 12"):
            certify(text)
    monkeypatch.setattr(recheck, "MOST_BYTES", 1_000)
    with pytest.raises(OutOfReach, match="expanding u in 12 steps: expected at most 1,000 bytes, got"):
        certify(text)


def test_a_file(tmp_path):
    """What is written is what is returned, one line for each step, and reads back as accepted."""
    case = Case.parse("LG(3,6): (2,1) * (2,1) -> (2), q^(1)")
    path = write_certificate(tmp_path / "proof.json", case, rule_value=0, **ABOUT)
    data = recheck.read(path)
    assert data == certificate_of(case, rule_value=0, **ABOUT)
    assert path.read_text(encoding="ascii").count('{"class": [') >= len(data["steps"])
    assert list(recheck.judge([path])) == [(0, f"accepted: {recheck.check(data)}")]


def test_nothing_is_written_where_there_is_none(tmp_path):
    """Where there is no certificate no file appears."""
    with pytest.raises(OutOfReach):
        write_certificate(tmp_path / "proof.json", Row.parse("Gr(2,4): (1) * (1)"), rule_value=None, **ABOUT)
    assert not list(tmp_path.iterdir())


def test_a_wrong_oracle_gets_no_certificate(monkeypatch):
    """If the oracle said another value, its certificate would not pass the checker: there is none."""
    monkeypatch.setattr("conjcheck.evidence.certificate.constant", lambda u, v, w, d: 7)
    with pytest.raises(OutOfReach, match="the steps give N = 1, got value 7 in the claim"):
        certify("Gr(2,4): (1) * (1) -> (2)")


def test_a_rule_may_not_ask():
    """A rule that makes certificates asks the oracle."""
    with pytest.raises(NotIndependent), watched(Watch()):
        certify("Gr(2,4): (1) * (1) -> (2)")


@pytest.mark.parametrize(
    "text", ["Fl(5): [21543] * [34125] -> [54312], q^(0,0,0,0)", "D4/B: [-1.2.3.-4] * [3.1.4.2] -> [1.3.-2.-4], q^(0,1,1,1)"]
)
def test_where_the_search_gives_up(text, monkeypatch):
    """Where no short expression is found the relations of the recursion serve, at more steps; where there are none that is the reason."""
    short = certify(text)
    monkeypatch.setattr("conjcheck.evidence.certificate.expression", lambda *given, **options: None)
    long = certify(text)
    assert recheck.check(long).split(" (")[0] == recheck.check(short).split(" (")[0]
    assert len(long["steps"]) >= len(short["steps"])
    with pytest.raises(OutOfReach, match=r"no short expression was found, and E6/B has 51,840 classes"):
        certify("E6/P1: <2.5.4.3.1> * <2.5.4.3.1> -> <1.3.5.4.2.6.5.4.3.1>, q^(0)")
