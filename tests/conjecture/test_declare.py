"""Declarations: what becomes a conjecture, and what every wrong one is told."""

import dataclasses
import functools
import inspect

import pytest

from conjcheck import CompleteFlags, Conjecture, Gr, Grassmannians, Varieties, candidate, claim
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import DeclarationError


def single(X, u, v, w, d):
    """A rule by cases."""
    return 1


def whole(X, u, v):
    """A rule by rows."""
    return {}


def single_classical(X, u, v, w):
    """A rule by cases, without degrees."""
    return 1


def single_claim(X, u, v, w, d, N):
    """A claim about cases."""
    return True


def whole_claim(X, u, v, N):
    """A claim about rows."""
    return True


def single_classical_claim(X, u, v, w, N):
    """A claim about cases, without degrees."""
    return True


@pytest.mark.parametrize(
    ("decorator", "rule", "ring", "by_rows"),
    [
        (candidate, single, "quantum", False),
        (candidate, whole, "quantum", True),
        (candidate, single_classical, "classical", False),
        (candidate, whole, "classical", True),
        (claim, single_claim, "quantum", False),
        (claim, whole_claim, "quantum", True),
        (claim, single_classical_claim, "classical", False),
        (claim, whole_claim, "classical", True),
    ],
)
def test_signatures(decorator, rule, ring, by_rows):
    """The names of the arguments alone decide whether a rule speaks about cases or rows, in either ring and role."""
    made = decorator(on=Grassmannians(), ring=ring)(rule)
    assert isinstance(made, Conjecture)
    assert (made.role, made.ring, made.by_rows) == (decorator.__name__, ring, by_rows)
    assert made.is_classical == (ring == "classical")


def test_what_it_remembers():
    """A conjecture keeps everything it was declared with, is frozen, and compares by identity."""
    premise = lambda X, u, v: True  # noqa: E731
    made = candidate(
        on=CompleteFlags(), premise=premise, statement=r"N = 1", references=["A. Author (1900)"], contributors=("B. Builder",)
    )(single)
    assert (made.name, made.rule, made.premise, made.premise_by_rows) == ("single", single, premise, True)
    assert (made.statement, made.references, made.contributors) == ("N = 1", ("A. Author (1900)",), ("B. Builder",))
    assert made.on.name == CompleteFlags().name
    assert made.file == __file__
    assert repr(made) == "<candidate single on complete flag varieties>"
    with pytest.raises(dataclasses.FrozenInstanceError):
        made.ring = "classical"
    assert made != candidate(on=CompleteFlags())(single)
    assert len({made, made}) == 1


def test_still_a_function():
    """A decorated rule can be called, and shows the name, docstring and signature of the function."""
    made = candidate(on=Grassmannians())(single)
    X = Gr(2, 4)
    assert made(X, X.identity, X.identity, d=(0,), w=X.identity) == 1
    assert made.__doc__ == "A rule by cases."
    assert made.__name__ == "single"
    assert list(inspect.signature(made).parameters) == ["X", "u", "v", "w", "d"]


def test_decorated_functions():
    """Below the decorator another one may stand: the signature and the file are those of the function that was written."""

    def traced(function):
        @functools.wraps(function)
        def wrapper(*args):
            return function(*args)

        return wrapper

    made = candidate(on=Grassmannians())(traced(whole))
    assert made.by_rows
    assert made.name == "whole"
    assert made.file == __file__


def test_wrapped_by_another_file():
    """The file of a rule is where it is written, not where its wrapper is: records belong beside the rule."""
    namespace = {"functools": functools}
    source = "def traced(f):\n    @functools.wraps(f)\n    def wrapper(*args):\n        return f(*args)\n    return wrapper\n"
    exec(compile(source, "elsewhere.py", "exec"), namespace)
    assert candidate(on=Grassmannians())(namespace["traced"](whole)).file == __file__


@pytest.mark.parametrize(
    ("premise", "ring", "by_rows"),
    [
        (lambda X, u, v: True, "quantum", True),
        (lambda X, u, v, w, d: True, "quantum", False),
        (lambda X, u, v: True, "classical", True),
        (lambda X, u, v, w: True, "classical", False),
    ],
)
def test_premises(premise, ring, by_rows):
    """A premise speaks about rows or about cases, by the names of its arguments."""
    assert candidate(on=Grassmannians(), premise=premise, ring=ring)(whole).premise_by_rows is by_rows


def generator(X, u, v):
    """No predicate."""
    yield True


class WithCall:
    """A callable object with the right signature."""

    def __call__(self, X, u, v):
        return True


def test_callable_premise():
    """A premise may be any callable with the right arguments."""
    assert candidate(on=Grassmannians(), premise=WithCall())(whole).premise_by_rows
    partial = functools.partial(lambda X, u, v, most: u.length <= most, most=3)
    with pytest.raises(DeclarationError, match=r"expected the arguments \(X, u, v, w, d\) or \(X, u, v\) for the premise, got"):
        candidate(on=Grassmannians(), premise=partial)(whole)


QUANTUM_RULE = r"expected the arguments \(X, u, v, w, d\) or \(X, u, v\) for the rule, got "


@pytest.mark.parametrize(
    ("decorator", "choices", "rule", "words"),
    [
        (candidate, {"on": "Gr(2,4)"}, whole, r"expected a family for on, got on='Gr\(2,4\)'; write on=Grassmannians\(\)"),
        (candidate, {"on": Gr(2, 4)}, whole, r"expected a family for on, got on=FlagVariety\('Gr\(2,4\)'\)"),
        (candidate, {"on": Grassmannians}, whole, "expected a family for on, got on=<function Grassmannians"),
        (candidate, {"ring": "cubic"}, whole, "expected ring to be one of 'quantum', 'classical', .*, got ring='cubic'"),
        (candidate, {"ring": None}, whole, "got ring=None"),
        (candidate, {"ring": ["quantum"]}, whole, "got ring="),
        (candidate, {"statement": 5}, whole, "expected a str in LaTeX for statement, got statement=5"),
        (
            candidate,
            {"references": "one"},
            whole,
            r"expected a list of strings for references, got references='one'; write references=\[",
        ),
        (candidate, {"references": [1]}, whole, r"expected a list of strings for references, got references=\[1\]"),
        (candidate, {"references": None}, whole, "expected a list of strings for references, got references=None"),
        (candidate, {"contributors": 3}, whole, "expected a list of strings for contributors, got contributors=3"),
        (candidate, {"premise": True}, whole, "expected a function that returns a bool for premise, got premise=True"),
        (
            candidate,
            {"premise": generator},
            whole,
            "expected a function that returns a bool for premise, got premise=<function generator",
        ),
        (candidate, {"premise": lambda u, v: True}, whole, r"or \(X, u, v\) for the premise, got \(u, v\)"),
        (candidate, {"premise": bool}, whole, "for the premise"),
        (
            candidate,
            {"premise": lambda X, u, v, w, d: True, "ring": "classical"},
            whole,
            r"expected the arguments \(X, u, v, w\) or",
        ),
        (candidate, {}, lambda X, u, v, w: 1, QUANTUM_RULE + r"\(X, u, v, w\)"),
        (candidate, {}, lambda X, v, u: 1, QUANTUM_RULE + r"\(X, v, u\)"),
        (candidate, {}, lambda X, u, v, w, d, extra=1: 1, QUANTUM_RULE + r"\(X, u, v, w, d, extra\)"),
        (candidate, {}, lambda *args: 1, QUANTUM_RULE + r"\(\*args\)"),
        (candidate, {}, lambda X, u, v, *w: 1, QUANTUM_RULE),
        (candidate, {}, lambda X, u, *, v: 1, "for the rule"),
        (candidate, {}, lambda X, u, *v: 1, "for the rule"),
        (candidate, {}, single_claim, QUANTUM_RULE + r"\(X, u, v, w, d, N\)"),
        (
            candidate,
            {"ring": "classical"},
            single,
            r"expected the arguments \(X, u, v, w\) or \(X, u, v\) for the rule, got \(X, u, v, w, d\)",
        ),
        (claim, {}, single, r"expected the arguments \(X, u, v, w, d, N\) or \(X, u, v, N\) for the rule, got \(X, u, v, w, d\)"),
        (claim, {"ring": "classical"}, single_claim, r"expected the arguments \(X, u, v, w, N\) or \(X, u, v, N\) for the rule"),
        (claim, {"premise": lambda X, u, v, N: True}, whole_claim, r"for the premise, got \(X, u, v, N\)"),
        (
            claim,
            {"premise": lambda X, u, v, w, d: True},
            whole_claim,
            r"expected a premise on rows, .* since the claim is about rows",
        ),
    ],
    ids=range(29),
)
def test_refusals(decorator, choices, rule, words):
    """A wrong declaration is refused at once; the message names file, line, role and rule, what was expected, what came."""
    with pytest.raises(DeclarationError, match=words) as caught:
        decorator(**({"on": Varieties("Gr(2,4)")} | choices))(rule)
    line = rule.__code__.co_firstlineno
    assert str(caught.value).startswith(f"{__file__}:{line}: @{decorator.__name__} {rule.__name__}: expected ")


@pytest.mark.parametrize("thing", [5, WithCall(), WithCall, len, functools.partial(whole), staticmethod(whole), None])
def test_no_functions(thing):
    """What is no plain function is refused with what came and what to do."""
    with pytest.raises(
        DeclarationError, match=r"expected a plain function under @candidate, got .*; put @candidate\(on=...\) directly above a def"
    ):
        candidate(on=Grassmannians())(thing)


def test_the_family_is_compulsory():
    """Without a family, or with the parentheses forgotten, nothing is declared."""
    for decorator in (candidate, claim):
        with pytest.raises(TypeError, match="on"):
            decorator()(whole)
        with pytest.raises(TypeError):
            decorator(whole)


# -- open choices --------------------------------------------------------------------------------------------------------


def chosen(X, u, v, w, d, *, strict, drop=7):
    """A rule with open choices."""
    return (strict, drop)


VARIANTS = {"strict": (False, True), "drop": [1, 0, 2]}


def test_the_first_values_are_the_rule():
    """A rule with open choices is declared with their first values: a call needs none, and the choice is told."""
    made = candidate(on=Grassmannians(), variants=VARIANTS)(chosen)
    X = Gr(2, 4)
    assert made(X, X.identity, X.identity, X.identity, (0,)) == (False, 1)
    assert dict(made.choice) == {"strict": False, "drop": 1}
    assert dict(made.variants) == {"strict": (False, True), "drop": (1, 0, 2)}
    assert made.choice_in_words == "strict=False, drop=1"
    assert made.number_of_variants == 6
    assert not made.by_rows
    with pytest.raises(TypeError):
        made.choice["strict"] = True
    with pytest.raises(TypeError):
        made.variants["strict"] = ()


def test_variants_are_conjectures():
    """Each combination, in the order of the declaration, is a conjecture of the same name, file, line, family, premise and page."""
    premise = lambda X, u, v: u.length == 1  # noqa: E731
    made = candidate(on=Grassmannians(), premise=premise, variants=VARIANTS)(chosen)
    found = list(made.all_variants())
    assert [one(*[None] * 5) for one in found] == [(False, 1), (False, 0), (False, 2), (True, 1), (True, 0), (True, 2)]
    for one in found:
        assert (one.name, one.file, one.line) == ("chosen", __file__, chosen.__code__.co_firstlineno)
        assert (one.on, one.premise, one.premise_by_rows, one.role) == (made.on, premise, True, "candidate")
        assert one.__doc__ == "A rule with open choices."
        assert one.rule(*[None] * 5) == (one.choice["strict"], one.choice["drop"])


def test_a_choice_keeps_the_others():
    """``variant`` changes what it is told and nothing else, also of a variant; the conjecture it came from stays as it is."""
    made = candidate(on=Grassmannians(), variants=VARIANTS)(chosen)
    other = made.variant(strict=True).variant(drop=2)
    assert other(*[None] * 5) == (True, 2)
    assert made(*[None] * 5) == (False, 1)
    assert other.called("renamed").choice_in_words == "strict=True, drop=2"
    assert other.variant(strict=False, drop=1)(*[None] * 5) == (False, 1)
    assert isinstance(other.rule.func, type(chosen)), "choices do not pile up"


def test_variants_go_through_other_decorators():
    """A decorator below is called for every variant, too."""
    seen = []

    def traced(function):
        @functools.wraps(function)
        def wrapper(*args, **choice):
            seen.append(choice)
            return function(*args, **choice)

        return wrapper

    made = candidate(on=Grassmannians(), variants=VARIANTS)(traced(chosen))
    assert made.variant(drop=0)(*[None] * 5) == (False, 0)
    assert seen == [{"strict": False, "drop": 0}]
    assert made.file == __file__


@pytest.mark.parametrize("choice", [{"strict": 5}, {"wide": True}, {"drop": 3, "strict": True}])
def test_a_choice_that_is_not_offered(choice):
    """Another argument, or another value, is refused with what is offered."""
    made = candidate(on=Grassmannians(), variants=VARIANTS)(chosen)
    words = r"expected a choice among those of chosen \(strict=\(False, True\), drop=\(1, 0, 2\)\), got "
    with pytest.raises(DeclarationError, match=words):
        made.variant(**choice)
    with pytest.raises(DeclarationError, match=r"expected a choice among those of whole \(no open choices\), got"):
        candidate(on=Grassmannians())(whole).variant(**choice)


def test_without_open_choices():
    """A rule without variants is its own only one; a whole-product rule may have some."""
    plain = candidate(on=Grassmannians())(whole)
    assert (dict(plain.choice), plain.choice_in_words, plain.number_of_variants) == ({}, "", 1)
    assert [one.rule for one in plain.all_variants()] != []

    @candidate(on=Grassmannians(), ring="classical", variants={"a": (1, 2)})
    def rows(X, u, v, *, a):
        return {u: a}

    assert rows.by_rows
    assert [one(None, 0, None) for one in rows.all_variants()] == [{0: 1}, {0: 2}]


@pytest.mark.parametrize(
    ("variants", "rule", "words"),
    [
        (
            {"strict": (0, 1)},
            single,
            r"expected a keyword-only argument for each of the variants, got none for strict; write def single",
        ),
        ({"w": (0, 1)}, single, "expected a keyword-only argument for each of the variants, got none for w"),
        ({"strict": (0, 1)}, chosen, r"expected the arguments .* for the rule, got \(X, u, v, w, d, \*drop\)"),
        ({"strict": (), "drop": (1,)}, chosen, r"expected variants=\{"),
        ({"strict": 3, "drop": (1,)}, chosen, r"expected variants=\{"),
        ({"strict": "ab", "drop": (1,)}, chosen, r"expected variants=\{"),
        (["strict"], chosen, r"expected variants=\{"),
        ({"strict": (0, 1, 0), "drop": (1,)}, chosen, r"expected different values for strict in variants, got strict=\(0, 1, 0\)"),
        ({"strict": (False, 0), "drop": (1,)}, chosen, "expected different values for strict"),
    ],
)
def test_variants_that_are_refused(variants, rule, words):
    """Every variant is a keyword-only argument with some different values, and every keyword-only argument is a variant."""
    with pytest.raises(DeclarationError, match=words) as caught:
        candidate(on=Grassmannians(), variants=variants)(rule)
    assert str(caught.value).startswith(f"{__file__}:{rule.__code__.co_firstlineno}: @candidate {rule.__name__}: ")


def test_claims_have_no_variants():
    """The decorator for claims does not take any."""
    with pytest.raises(TypeError, match="variants"):
        claim(on=Grassmannians(), variants={"a": (1,)})


def test_variants_in_a_file(tmp_path):
    """A plug-in with open choices is found once, under its name, with the first values."""
    path = tmp_path / "open.py"
    path.write_text(
        "from conjcheck import Grassmannians, candidate\n"
        "@candidate(on=Grassmannians(), variants={'n': (3, 4)})\n"
        "def rule(X, u, v, *, n):\n    return {(u, (0,)): n}\n"
    )
    (found,) = conjectures_in_file(path)
    assert (found.name, dict(found.choice), found.line, found.file) == ("rule", {"n": 3}, 2, str(path))
    assert [one.name for one in found.all_variants()] == ["rule", "rule"]
