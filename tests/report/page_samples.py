"""Outcomes, documents and records to make pages of; and hostile ones, whose texts try to be more than texts."""

import re
from dataclasses import replace
from functools import cache
from html.parser import HTMLParser
from pathlib import Path

from conjcheck import Grassmannians, Varieties, candidate, examine
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.report.document import document_of_outcomes, document_of_record, unreadable
from conjcheck.testing.examine import EFFORTS, Examination

CONJECTURES = Path(__file__).parents[2] / "conjectures"
BUNDLED = {"lantern": "lantern_rule", "puzzles": "step_puzzles", "cayley": "cayley_plane_bound"}

TAGS = "</code></script><script>alert(1)</script><img src=x onerror=alert(2)>\"'&amp;"
TURNED = "\u05e9\u05dc\u05d5\u05dd \u202eturned\u202c \u0627\u0644"
HALF = "\ud800\x00\x07"


@candidate(on=Varieties("Gr(1,3)", "Gr(1,4)"), statement=r"h^i * h^j = q^{?} h^{i+j}", references=["the definition"])
def powers(X, u, v):
    """Quantum cohomology of projective space: powers of one class."""
    total = u.length + v.length
    return {(X.of_length(total % X.n)[0], (total // X.n,)): 1}


@candidate(on=Grassmannians(), statement=r"\frac{")
def falls(X, u, v, w, d):
    """A rule that raises at lines."""
    if u.length == v.length == 1:
        raise ValueError("expected <b>no</b> lines")
    return powers.rule(X, u, v).get((w, d), 0)


@cache
def outcomes(name):
    """The JSON forms of the outcomes of a quick examination; of a bundled rule, which is false, of its survey."""
    rules = {"agrees": powers, "crashed": falls}
    if name in rules:
        return [outcome.as_json() for outcome in examine(rules[name], effort="quick", seed=1)]
    rule = conjectures_in_file(CONJECTURES / f"{BUNDLED[name]}.py")[0]
    effort = replace(EFFORTS["quick"], diagnosis=0.3)
    return [Examination(rule, effort).survey().as_json()]


def hostile_record():
    """A record that is one, with texts that try to be markup, code, or to turn the direction of writing."""
    covered = {"rows": 31, "seen": 31, "cases": 90, "nonzero": 5, "failing": 1, "seconds": 1, "engine": TAGS, "conjcheck": TURNED}
    sample = {"space": "Gr(2,5)", "how": TAGS + TURNED, "seed": 3, "rows": 100, "cases": 200, "failing": 0, "conjcheck": TAGS}
    bound = "at 95 % the share of failing rows inside the premise, weighted as drawn, is at most 0.0296"
    found = {
        "where": "Gr(2,5): (2) * (2,1) -> (), q^(1)",
        "rule": TAGS + "a" * 2000,
        "oracle": TURNED,
        "minimal": True,
        "certificate": "<script>alert(3).json",
        "instead": None,
        "rule_hash": "sha256:" + "0" * 64,
    }
    return {
        "format": "conjcheck-record",
        "version": 1,
        "conjecture": "\u05e9\u05dc\u05d5\u05dd",
        "status": "refuted",
        "statement": TAGS + TURNED + "x" * 3000,
        "ring": "quantum",
        "premise": None,
        "rule": "sha256:" + "0" * 64,
        "coverage": [{"space": "Gr(2,5)", "of": 100, **covered}],
        "samples": [sample | {"bound": bound}],
        "counterexamples": [found],
    }


def hostile_outcome():
    """The JSON form of an outcome in which every text is hostile and some values have another type."""
    bad = TAGS + TURNED + HALF
    return {
        "conjecture": bad + "L" * 3000,
        "file": f"/{bad}/x.py",
        "part": bad,
        "status": bad,
        "verdict": bad,
        "scope": bad,
        "where": bad,
        "cases": "many",
        "seconds": None,
        "about": {
            "statement": bad,
            "description": bad,
            "references": [bad, 7],
            "contributors": bad,
            "choice": {bad: bad},
            "role": 5,
        },
        "spaces": [{"space": bad, "seen": bad}, bad, {"space": bad, "drawn": True}],
        "environment": bad,
        "note": bad,
        "rule": bad,
        "oracle": [bad],
        "kinds": [bad],
        "detail": bad,
        "trace": bad,
        "remedy": bad,
        "minimality": bad,
        "objects": [bad],
        "broken_law": bad,
        "replay": bad,
        "seed": bad,
        "products": {
            "rule": {"terms": [{"w": bad, "d": [bad], "n": bad}, bad]},
            "oracle": {"terms": [], "more": 1},
            "partial": bad,
        },
        "layer": {"failures": [{"where": bad, "rule": bad}, bad], "pairs": bad},
        "diagnosis": {
            "signs": [bad],
            "firsts": {bad: bad},
            "conditions": [{"words": bad, "expression": bad}, bad],
            "suggestion": {"words": bad},
        },
    }


@cache
def document(name):
    """A document by name."""
    if name == "record":
        return document_of_record(hostile_record(), file="conjectures/records/x.json", made="2026-01-01")
    if name == "outcome":
        return document_of_outcomes([hostile_outcome()])
    if name == "unreadable":
        return unreadable({"conjecture": TAGS + HALF, "</pre><script>alert(4)</script>": [TURNED]}, TAGS, file="x.json")
    return document_of_outcomes(outcomes(name), made="2026-01-01 10:00 UTC")


NAMES = ("lantern", "puzzles", "cayley", "agrees", "crashed", "record", "outcome", "unreadable")
HOSTILE = ("record", "outcome", "unreadable")


class Seen(HTMLParser):
    """What a page holds: tags with their attributes in order, headings, and the text that is shown."""

    def __init__(self, text):
        super().__init__()
        self.tags, self.headings, self.open, shown = [], [], [], []
        self.shown = shown
        self.feed(text)
        self.close()
        self.text = re.sub(r"\s+", " ", "".join(shown))

    def handle_starttag(self, tag, attributes):
        self.tags.append((tag, dict(attributes)))
        if tag not in ("meta", "br", "input", "wbr"):
            self.open.append(tag)
        if re.fullmatch(r"h[1-6]", tag):
            self.headings.append(int(tag[1]))

    def handle_endtag(self, tag):
        assert self.open.pop() == tag, f"{tag} is closed where another element is open"

    def handle_data(self, data):
        if not {"style", "script"} & set(self.open):
            self.shown.append(data)

    def named(self, tag):
        """The attributes of all elements with a tag."""
        return [attributes for name, attributes in self.tags if name == tag]
