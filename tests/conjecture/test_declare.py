"""Declarations: what becomes a conjecture, and what every wrong one is told."""

import dataclasses
import functools
import inspect

import pytest

from conjcheck import CompleteFlags, Conjecture, Gr, Grassmannians, Varieties, candidate, claim
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
