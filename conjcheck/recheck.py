"""Check a certificate: a small JSON file that proves one value ``N_{u,v}^{w,d}`` from the quantum Chevalley formula alone.

Stand-alone: standard library only, nothing of conjcheck. Copy this one file anywhere and run ``python3 recheck.py certificate.json``.

It computes itself: the root system of the type, elements of the Weyl group as permutations of the roots, every product with a
divisor on G/B by the quantum Chevalley formula

    L * sigma_y = sum over l(y s_a) = l(y) + 1                     of           <L, a^vee> sigma_{y s_a}
                + sum over l(y s_a) = l(y) + 1 - <2 rho, a^vee> of q^{a^vee} <L, a^vee> sigma_{y s_a}

and the lift from G/P to G/B: ``N_{u,v}^{w,d}(G/P) = N_{u,v}^{w w_P w_P', lambda}(G/B)``, where lambda is the one coroot vector that
extends d with ``<a, lambda>`` 0 or -1 for all positive roots a of P, and P' has the simple roots a of P with ``<a, lambda> = 0``.

A step says ``times * sigma_x = sum of L * sigma_z - (minus)``, all z and all of minus reached before. Each step is checked, and then
multiplied by the other factor, by associativity. All this modulo the powers of q that do not divide ``q^lambda``: they span an ideal and
cannot matter. Words are the lexicographically first reduced ones, nodes numbered as by Bourbaki.

Not proven, only bound by the digest: the name, hash and value of the rule, and the version of conjcheck.

Sources: Fulton, Woodward, On the quantum product of Schubert classes, J. Algebraic Geom. 13 (2004), Theorem 10.1; Woodward, On D.
Peterson's comparison formula for Gromov-Witten invariants of G/P, Proc. Amer. Math. Soc. 133 (2005), Theorem 3.
"""

import argparse
import hashlib
import json
import re
import subprocess
import sys
from collections.abc import Iterable, Iterator
from itertools import pairwise
from pathlib import Path
from typing import Any

__all__ = [
    "FORMAT",
    "MOST_BYTES",
    "MOST_STEPS",
    "RANKS",
    "VERSION",
    "Rejected",
    "Unusable",
    "WeylGroup",
    "case_text",
    "check",
    "digest",
    "judge",
    "main",
    "read",
    "rule_again",
]

FORMAT = "conjcheck-certificate"
VERSION = 1
MOST_BYTES = 1_000_000
MOST_STEPS = 500
MOST_WORK = 4_000_000
MOST_COUNT = 10**9
MOST_DIGITS = 40
RULE_SECONDS = 120
RANKS = {"A": (1, 12), "B": (2, 12), "C": (2, 12), "D": (4, 12), "E": (6, 8), "F": (4, 4), "G": (2, 2)}

Vector = tuple[int, ...]
Terms = dict[tuple[Vector, Vector], int]
"""Sum of ``c q^d sigma_w`` as ``{(w, d): c}``."""
Values = dict[Vector, Terms]


class Rejected(Exception):
    """The file proves nothing; the message says why."""


class Unusable(Exception):
    """There is no file to judge, or no rule to ask; the message says why."""


class WeylGroup:
    """A Weyl group on its root system.

    Roots have numbers: the positive ones ``0..R-1``, the simple ones first, and ``k + R`` is minus root k. An element w is the tuple
    of the numbers of ``w(root k)`` for k < R.
    """

    def __init__(self, letter: str, rank: int) -> None:
        self.letter, self.rank, self.work, matrix = letter, rank, 0, cartan_matrix(letter, rank)
        units = [tuple(int(i == j) for j in range(rank)) for i in range(rank)]
        coroots = dict(zip(units, units, strict=True))
        for root in (todo := list(units)):
            for j in range(rank):
                down = sum(root[i] * matrix[i][j] for i in range(rank))
                image = (*root[:j], root[j] - down, *root[j + 1 :])
                if down < 0 and image not in coroots:
                    old = coroots[root]
                    codown = sum(matrix[j][i] * old[i] for i in range(rank))
                    coroots[image] = (*old[:j], old[j] - codown, *old[j + 1 :])
                    todo.append(image)
        self.roots, self.coroots, self.R = todo, [coroots[root] for root in todo], len(todo)
        number = {root: k for k, root in enumerate(todo)} | {tuple(-x for x in root): k + self.R for k, root in enumerate(todo)}
        self.pairings = [tuple(sum(a * x for a, x in zip(row, c, strict=True)) for row in matrix) for c in self.coroots]
        self.reflections = []
        for root, pairing in zip(todo, self.pairings, strict=True):
            images = []
            for other in todo:
                height = sum(a * b for a, b in zip(other, pairing, strict=True))
                images.append(number[tuple(x - height * y for x, y in zip(other, root, strict=True))])
            self.reflections.append(tuple(images + [self.minus(k) for k in images]))
        self.identity = tuple(range(self.R))
        self._terms: dict[Vector, list[tuple[Vector, Vector, Vector]]] = {}

    def minus(self, k: int) -> int:
        """The number of minus a root."""
        return k + self.R if k < self.R else k - self.R

    def spend(self, amount: int) -> None:
        """Count work, and end when it is too much."""
        self.work += amount
        if self.work > MOST_WORK:
            raise Rejected(f"expected a derivation that takes at most {MOST_WORK:,} units of work, got a longer one")

    def times(self, w: Vector, *others: int) -> Vector:
        """``w s_a s_b ...`` for numbers a, b, ... of positive roots; node i has the number ``i - 1``."""
        for a in others:
            both = (*w, *map(self.minus, w))
            w = tuple(both[k] for k in self.reflections[a][: self.R])
        return w

    def length(self, w: Vector) -> int:
        """The number of positive roots that w turns negative."""
        return sum(k >= self.R for k in w)

    def word(self, w: Vector) -> Vector:
        """The lexicographically first reduced word."""
        letters = []
        while falling := [i for i in range(self.rank) if i + self.R in w]:
            letters.append(falling[0] + 1)
            w = tuple(self.reflections[falling[0]][k] for k in w)
        return tuple(letters)

    def longest(self, nodes: list[int]) -> Vector:
        """The longest element of the subgroup of some nodes, as a word of numbers for ``times``."""
        w, word = self.identity, []
        while rising := [i - 1 for i in nodes if w[i - 1] < self.R]:
            w = self.times(w, rising[0])
            word.append(rising[0])
        return tuple(word)

    def terms(self, w: Vector) -> list[tuple[Vector, Vector, Vector]]:
        """The quantum Chevalley formula: ``(w s_a, d, a^vee)`` for each term ``<L, a^vee> q^d sigma_{w s_a}`` of ``L * sigma_w``."""
        if w not in self._terms:
            self.spend(self.R * self.R // 2)
            found, before, zero = [], self.length(w), (0,) * self.rank
            both = (*w, *map(self.minus, w))
            for a, coroot in enumerate(self.coroots):
                target = tuple(both[k] for k in self.reflections[a][: self.R])
                rise = self.length(target) - before
                if rise == 1 or rise == 1 - 2 * sum(coroot):
                    found.append((target, zero if rise == 1 else coroot, coroot))
            self._terms[w] = found
        return self._terms[w]

    def multiply(self, L: Vector, product: Terms, top: Vector) -> Terms:
        """``L * product`` modulo the powers of q that do not divide ``q^top``."""
        total: Terms = {}
        for (y, d), count in product.items():
            for target, e, coroot in self.terms(y):
                self.spend(1)
                if size := sum(a * b for a, b in zip(L, coroot, strict=True)):
                    self.add(total, size, e, {(target, d): count}, top)
        return total

    def add(self, total: Terms, factor: int, power: Vector, terms: Terms, top: Vector) -> None:
        """``total += factor * q^power * terms`` in place, modulo the powers of q that do not divide ``q^top``; zeros drop out."""
        for (w, d), count in terms.items():
            key = w, tuple(a + b for a, b in zip(d, power, strict=True))
            if all(a <= b for a, b in zip(key[1], top, strict=True)):
                self.spend(1 if key in total else 10)
                total[key] = total.get(key, 0) + factor * count
                if not total[key]:
                    del total[key]

    def combine(
        self, parts: list[tuple[Vector, Vector]], minus: list[tuple[int, Vector, Vector]], values: Values, top: Vector
    ) -> Terms:
        """The right side of a step, ``sum of L * value(z) - sum of count q^d value(z)``."""
        total: Terms = {}
        for L, z in parts:
            self.add(total, 1, (0,) * self.rank, self.multiply(L, values[z], top), top)
        for count, power, z in minus:
            self.add(total, -count, power, values[z], top)
        return total


def cartan_matrix(letter: str, rank: int) -> list[list[int]]:
    """``C[i][j] = <alpha_i, alpha_j^vee>``, 0-based (Bourbaki, Groupes et algebres de Lie, ch. 4-6 (1968), plates)."""
    matrix = [[2 * (i == j) for j in range(rank)] for i in range(rank)]
    chain = [(i, i + 1) for i in range(rank - 1)]
    if letter == "D":
        chain[-1] = (rank - 3, rank - 1)
    if letter == "E":
        chain = [(0, 2), (1, 3), *chain[2:]]
    for i, j in chain:
        matrix[i][j] = matrix[j][i] = -1
    doubled = {"B": (rank - 2, rank - 1, -2), "C": (rank - 1, rank - 2, -2), "F": (1, 2, -2), "G": (1, 0, -3)}
    if letter in doubled:
        i, j, entry = doubled[letter]
        matrix[i][j] = entry
    return matrix


def case_text(letter: str, rank: int, marked: Vector, words: list[Vector], d: Vector) -> str:
    """The case in the usual notation of its space, ``Fl(1,3;4): [2143] * [3241] -> [4123], q^(1,0)``, from words of u, v and w."""
    u, v, w = (_class_text(letter, rank, marked, word) for word in words)
    return f"{_space_text(letter, rank, marked)}: {u} * {v} -> {w}, q^({','.join(map(str, d))})"


def _space_text(letter: str, rank: int, marked: Vector) -> str:
    nodes, one = ",".join(map(str, marked)), len(marked) == 1
    if letter == "A":
        return f"Gr({nodes},{rank + 1})" if one else f"Fl({rank + 1})" if len(marked) == rank else f"Fl({nodes};{rank + 1})"
    if len(marked) == rank:
        return f"{letter}{rank}/B"
    if one and letter in "BD" and marked == (1,):
        return f"Q^{2 * rank - (1 if letter == 'B' else 2)}"
    if one and (letter in "BC" or (letter == "D" and marked != (rank - 1,))):
        form = "OG" if letter != "C" else "LG" if marked == (rank,) else "IG"
        return f"{form}({nodes},{2 * rank + (letter == 'B')})"
    return f"{letter}{rank}/P{nodes}"


def _class_text(letter: str, rank: int, marked: Vector, word: Vector) -> str:
    if letter in "EFG":
        return f"<{'.'.join(map(str, word))}>"
    line = list(range(1, rank + 1 + (letter == "A")))
    for i in word:
        if letter == "A" or i < rank:
            line[i - 1], line[i] = line[i], line[i - 1]
        elif letter == "D":
            line[-2], line[-1] = -line[-1], -line[-2]
        else:
            line[-1] = -line[-1]
    if letter == "A" and len(marked) == 1:
        return f"({','.join(str(line[i - 1] - i) for i in range(marked[0], 0, -1) if line[i - 1] > i)})"
    if letter == "A":
        return f"[{('' if rank < 9 else '.').join(map(str, line))}]"
    if marked == (rank,):
        top = rank if letter == "D" else rank + 1
        return f"({','.join(str(top + x) for x in sorted(line, reverse=True) if -top < x < 0)})"
    return f"[{'.'.join(map(str, line))}]"


def digest(data: dict[str, Any]) -> str:
    """The digest of everything in a certificate but its digest."""
    rest = {key: value for key, value in data.items() if key != "digest"}
    text = json.dumps(rest, sort_keys=True, separators=(",", ":"), ensure_ascii=True)
    return f"sha256:{hashlib.sha256(text.encode('ascii')).hexdigest()}"


def check(data: Any) -> str:
    """Judge a certificate that was read; the verdict in one sentence, without the word "accepted".

    Raises:
        Rejected: it proves nothing.
    """
    _object("the certificate", data, ("format", "version", "claim", "lift", "expand", "steps", "rule", "conjcheck", "digest"))
    if data["format"] != FORMAT or type(data["version"]) is not int or data["version"] != VERSION:
        raise Rejected(
            f'expected format "{FORMAT}" and version {VERSION}, got {_shown(data["format"])} and {_shown(data["version"])}'
        )
    claim = _object("claim", data["claim"], ("text", "type", "rank", "marked", "u", "v", "w", "d", "value"))
    rule = _object("rule", data["rule"], ("name", "hash", "value"))
    _text("rule.name", rule["name"], r"[^\W\d]\w{0,99}")
    _text("rule.hash", rule["hash"], r"sha256:[0-9a-f]{64}")
    _text("conjcheck", data["conjcheck"], r"\d{1,4}\.\d{1,4}\.\d{1,4}[a-z0-9.+]{0,20}")
    if rule["value"] is not None:
        _integer("rule.value", rule["value"], 0, 10**MOST_DIGITS)
    try:
        if _text("digest", data["digest"], r"sha256:[0-9a-f]{64}") != digest(data):
            raise Rejected("expected the digest of the rest of the file, got another one: the file was changed")
    except RecursionError:
        raise Rejected("expected lists in lists four deep, got more") from None
    letter = _text("type", claim["type"], "[A-G]")
    rank = _integer("rank", claim["rank"], *RANKS[letter])
    marked = _vector("marked", claim["marked"], rank, 1, rank)
    if not marked or any(a >= b for a, b in pairwise(marked)):
        raise Rejected(f"expected rising marked nodes, at least one, got {marked}")
    d = _vector("d", claim["d"], rank, 0, 999)
    if len(d) != len(marked):
        raise Rejected(f"expected {len(marked)} entries in d, one for each marked node, got {len(d)}")
    value = _integer("value", claim["value"], 0, 10**MOST_DIGITS)
    group = WeylGroup(letter, rank)
    u, v, w = (_element(group, name, claim[name]) for name in "uvw")
    levi = [i for i in range(1, rank + 1) if i not in marked]
    for name, element in zip("uvw", (u, v, w), strict=True):
        if any(element[i - 1] >= group.R for i in levi):
            raise Rejected(f"expected the shortest element of its coset for {name}, got {claim[name]}")
    if claim["text"] != (text := case_text(letter, rank, marked, [tuple(claim[name]) for name in "uvw"], d)):
        raise Rejected(f"expected the text {text!r} for these words, got {_shown(claim['text'])}")
    top, target = _lift(group, marked, d, w, data["lift"])
    _text("expand", data["expand"], "[uv]")
    long, other = (u, v) if data["expand"] == "u" else (v, u)
    known = _derive(group, data["steps"], other, top)
    if long not in known:
        raise Rejected(f"expected steps that reach {data['expand']} = {group.word(long)}, got none that does")
    found = known[long].get((target, top), 0)
    if found != value:
        raise Rejected(f"the steps give N = {found}, got value {value} in the claim")
    asked = "the claim is about this constant" if rule["value"] is None else f"the rule is said to give {rule['value']}"
    steps = "1 step" if len(known) == 2 else f"{len(known) - 1} steps"
    return f"N = {value} at {text} ({steps} on {letter}{rank}/B; {rule['name']}: {asked})"


def _lift(group: WeylGroup, marked: Vector, d: Vector, w: Vector, lift: Any) -> tuple[Vector, Vector]:
    """The degree and the class on G/B, checked against the conditions that define them."""
    _object("lift", lift, ("d", "w"))
    top = _vector("lift.d", lift["d"], group.rank, 0, 99_999)
    if len(top) != group.rank or tuple(top[i - 1] for i in marked) != d:
        raise Rejected(f"expected in lift.d one entry for each node, and {d} at the marked ones, got {top}")
    levi = [i for i in range(1, group.rank + 1) if i not in marked]
    heights = []
    for root in group.roots:
        height = sum(x * sum(a * b for a, b in zip(root, group.pairings[j], strict=True)) for j, x in enumerate(top))
        heights.append(height)
        if height not in (0, -1) and not any(root[i - 1] for i in marked):
            raise Rejected(f"expected <a, lambda> to be 0 or -1 for all roots a of P, got {height} at {root} with lift.d = {top}")
    flat = [i for i in levi if heights[i - 1] == 0]
    target = group.times(w, *group.longest(levi), *group.longest(flat))
    if _element(group, "lift.w", lift["w"]) != target:
        raise Rejected(f"expected lift.w = w w_P w_P' = {group.word(target)}, got {tuple(lift['w'])}")
    return top, target


def _derive(group: WeylGroup, steps: Any, other: Vector, top: Vector) -> dict[Vector, Terms]:
    """Check all steps; ``sigma_x * sigma_other`` for every class x that they reach."""
    if not isinstance(steps, list) or len(steps) > MOST_STEPS:
        raise Rejected(f"expected a list of at most {MOST_STEPS} steps, got {_shown(steps)}")
    zero = (0,) * group.rank
    known: dict[Vector, Terms] = {group.identity: {(other, zero): 1}}

    def reached(name: str, word: Any) -> Vector:
        element = _element(group, name, word)
        if element not in known:
            raise Rejected(f"expected a class reached before as {name}, got {tuple(word)}")
        return element

    for place, step in enumerate(steps, start=1):
        _object(f"step {place}", step, ("class", "times", "from", "minus"))
        x = _element(group, f"step {place}", step["class"])
        times = _integer(f"step {place}, times", step["times"], 1, MOST_COUNT)
        if x in known:
            raise Rejected(f"expected a new class in step {place}, got {tuple(step['class'])} again")
        parts, minus = [], []
        for part in _list(f"step {place}, from", step["from"]):
            _object(f"step {place}, from", part, ("divisor", "class"))
            L = _vector(f"step {place}, divisor", part["divisor"], group.rank, -MOST_COUNT, MOST_COUNT)
            if len(L) != group.rank:
                raise Rejected(f"expected {group.rank} entries in the divisor of step {place}, got {len(L)}")
            parts.append((L, reached(f"step {place}, from", part["class"])))
        for term in _list(f"step {place}, minus", step["minus"]):
            _object(f"step {place}, minus", term, ("count", "d", "class"))
            count = _integer(f"step {place}, count", term["count"], -MOST_COUNT, MOST_COUNT)
            power = _vector(f"step {place}, d", term["d"], group.rank, 0, MOST_COUNT)
            if not count or len(power) != group.rank or any(a > b for a, b in zip(power, top, strict=True)):
                raise Rejected(f"expected a nonzero count and a degree of at most {top} in step {place}, got {count} and {power}")
            minus.append((count, power, reached(f"step {place}, minus", term["class"])))

        if group.combine(parts, minus, {z: {(z, zero): 1} for z in known}, top) != {(x, zero): times}:
            raise Rejected(f"step {place} is false: by the quantum Chevalley formula its two sides differ")
        whole = group.combine(parts, minus, known, top)
        if any(count % times for count in whole.values()):
            raise Rejected(f"expected integers after the division by {times} in step {place}, got fractions")
        known[x] = {key: count // times for key, count in whole.items()}
    return known


def _shown(value: Any) -> str:
    """A value in a message, cut short."""
    if isinstance(value, (list, dict)):
        return f"{'a list' if isinstance(value, list) else 'an object'} of {len(value)}"
    text = ascii(value)
    return text if len(text) <= 80 else f"{text[:80]}..."


def _object(name: str, value: Any, keys: tuple[str, ...]) -> dict[str, Any]:
    if not isinstance(value, dict) or set(value) != set(keys):
        got = ", ".join(map(_shown, sorted(value)[:12])) if isinstance(value, dict) else _shown(value)
        raise Rejected(f"expected exactly the keys {', '.join(keys)} in {name}, got {got}")
    return value


def _list(name: str, value: Any) -> list[Any]:
    if not isinstance(value, list) or len(value) > 5_000:
        raise Rejected(f"expected a list of at most 5,000 as {name}, got {_shown(value)}")
    return value


def _integer(name: str, value: Any, low: int, high: int) -> int:
    if type(value) is not int or not low <= value <= high:
        raise Rejected(f"expected an integer from {_shown(low)} to {_shown(high)} as {name}, got {_shown(value)}")
    return value


def _vector(name: str, value: Any, most: int, low: int, high: int) -> Vector:
    if not isinstance(value, list) or len(value) > most:
        raise Rejected(f"expected a list of at most {most} integers as {name}, got {_shown(value)}")
    return tuple(_integer(f"entry of {name}", entry, low, high) for entry in value)


def _text(name: str, value: Any, shape: str) -> str:
    if not isinstance(value, str) or not re.fullmatch(shape, value):
        raise Rejected(f"expected a text of the form {shape} as {name}, got {_shown(value)}")
    return value


def _element(group: WeylGroup, name: str, value: Any) -> Vector:
    """The element of a word, which must be the lexicographically first reduced one."""
    word = _vector(name, value, group.R, 1, group.rank)
    group.spend(len(word) * group.R)
    element = group.times(group.identity, *(i - 1 for i in word))
    if (first := group.word(element)) != word:
        raise Rejected(f"expected the first reduced word {first} for {name}, got {word}")
    return element


def read(path: str | Path) -> Any:
    """Read a certificate; nothing in it is believed.

    Raises:
        Unusable: no regular file, or not readable, or a record.
        Rejected: not JSON in UTF-8 with integers only, keys once, and of a bounded size.
    """
    try:
        if not Path(path).is_file():
            raise Unusable(f"expected a file, got {str(path)!r}, which is none")
        with Path(path).open("rb") as file:
            raw = file.read(MOST_BYTES + 1)
    except (OSError, ValueError) as error:
        raise Unusable(f"expected a readable file, got {error}") from None
    if len(raw) > MOST_BYTES:
        raise Rejected(f"expected at most {MOST_BYTES:,} bytes, got more")
    if raw.lstrip(b"{ \r\n\t").startswith(b'"format": "conjcheck-record"'):
        named = sorted({_shown(name)[1:-1] for name in re.findall('"certificate": "([^"]+)"', raw.decode("utf-8", "replace"))})
        which = f"its certificates are, beside it, {', '.join(named[:20])}" if named else "it names no certificate"
        raise Unusable(f"expected a certificate, got {_shown(str(path))}: a record, no certificate; {which}")

    def once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        found = dict(pairs)
        if len(found) != len(pairs):
            raise Rejected("expected each key once in an object, got one twice")
        return found

    def whole(text: str) -> int:
        if len(text) > MOST_DIGITS + 1:
            raise Rejected(f"expected numbers of at most {MOST_DIGITS} digits, got one of {len(text)}")
        return int(text)

    def refused(text: str) -> None:
        raise Rejected(f"expected integers only, got {_shown(text)}")

    try:
        return json.loads(raw.decode("utf-8"), object_pairs_hook=once, parse_int=whole, parse_float=refused, parse_constant=refused)
    except (ValueError, RecursionError) as error:
        raise Rejected(f"expected JSON in UTF-8, got {type(error).__name__}: {_shown(str(error))}") from None


def rule_again(data: dict[str, Any], target: str) -> tuple[bool, str]:
    """Ask the rule at ``FILE::NAME`` again, in a process of its own with an installed conjcheck: ``(as certified, sentence)``.

    Raises:
        Unusable: conjcheck is not installed here, the target is no rule, or it did not answer in time.
    """
    command = [sys.executable, "-m", "conjcheck.evidence.rerun", target, data["claim"]["text"]]
    try:
        done = subprocess.run(command, capture_output=True, text=True, timeout=RULE_SECONDS, check=False)  # noqa: S603
        answer = json.loads(done.stdout.splitlines()[-1])
        value, same_file, name = answer["rule"], answer["hash"] == data["rule"]["hash"], answer["name"]
    except subprocess.TimeoutExpired:
        raise Unusable(f"expected the rule to answer within {RULE_SECONDS} seconds, got no answer") from None
    except (OSError, ValueError, LookupError, TypeError):
        last = (done.stderr.strip().splitlines() or ["no answer"])[-1]
        hint = "; --rule needs an installed conjcheck: in its clone, pip install -e ." if "No module named" in last else ""
        raise Unusable(f"expected conjcheck to ask the rule {target!r}, got {_shown(last)}{hint}") from None
    file = f"its file {'is unchanged' if same_file else 'has changed since'}"
    if answer["status"] not in ("agrees", "refuted"):
        return False, f"rule: {name} gives no value there now: {_shown(answer['status'])}; {file}"
    if data["rule"]["value"] is None:
        still = answer["status"] == "refuted"
        return still, f"rule: {name} is {'still false' if still else 'no longer false'} there; {file}"
    if value == data["rule"]["value"]:
        return True, f"rule: {name} still gives {value} there; {file}"
    return False, f"rule: {name} now gives {value} there, not {data['rule']['value']}; {file}"


def judge(paths: Iterable[str | Path], rule: str | None = None) -> Iterator[tuple[int, str]]:
    """The verdicts as pairs of an exit status (0 accepted, 1 rejected, 2 unusable) and a line, in the order of the files.

    With ``rule``, ``FILE::NAME``, each accepted certificate is followed by a line that says what this rule gives there now.
    """
    for path in paths:
        try:
            data = read(path)
            yield 0, f"accepted: {check(data)}"
            if rule:
                same, sentence = rule_again(data, rule)
                yield 0 if same else 1, sentence
        except Rejected as reason:
            yield 1, f"rejected: {reason}"
        except Unusable as reason:
            yield 2, f"unusable: {reason}"


def main(arguments: list[str] | None = None) -> int:
    """The command line; the exit status is 0 accepted, 1 rejected, 2 wrong usage or no usable file."""
    parser = argparse.ArgumentParser(prog="recheck", description="Check certificates of structure constants.")
    parser.add_argument("certificates", nargs="+", metavar="CERTIFICATE", help="a JSON file")
    parser.add_argument("--rule", metavar="FILE::NAME", help="also ask this rule again (needs an installed conjcheck)")
    chosen = parser.parse_args(arguments)
    worst = 0
    for status, line in judge(chosen.certificates, chosen.rule):
        print(line, file=sys.stderr if status == 2 else sys.stdout)
        worst = max(worst, status)
    return worst


if __name__ == "__main__":
    sys.exit(main())
