"""The stand-alone checker: right geometry, and no certificate that says anything false gets through."""

import copy
import json
import random
import re
import resource
import shutil
import subprocess
import sys
import time
from functools import cache
from pathlib import Path

import pytest

from conjcheck import Case, FlagVariety, constant, recheck
from conjcheck.errors import ConjcheckError
from conjcheck.evidence.certificate import certificate_of
from conjcheck.evidence.expression import expression
from conjcheck.geometry.cartan import CartanType, cartan_matrix, positive_roots
from conjcheck.geometry.families import HomogeneousSpaces
from conjcheck.oracle.chevalley import chevalley

ABOUT = {"conjecture_name": "my_rule", "rule_hash": "sha256:" + "a" * 64}
CASES = {
    "Gr(3,5): (2) * (2,1) -> (), q^(1)": 1,
    "Fl(1,2,3;5): [14325] * [21534] -> [34512], q^(0,0,0)": 0,
    "Fl(4): [2143] * [3241] -> [4123], q^(0,0,1)": None,
    "LG(3,6): (2,1) * (2,1) -> (2), q^(1)": 4,
    "G2/B: <1.2.1> * <2.1.2> -> <1>, q^(1,1)": 3,
    "B2/B: [-2.1] * [1.-2] -> [-1.2], q^(0,0)": 7,
}
TYPES = [
    ("A", 1),
    ("A", 4),
    ("B", 2),
    ("B", 4),
    ("C", 2),
    ("C", 4),
    ("D", 4),
    ("D", 5),
    ("E", 6),
    ("E", 7),
    ("E", 8),
    ("F", 4),
    ("G", 2),
]


@cache
def certified(text):
    """The text of a certificate for a case of the list."""
    return json.dumps(certificate_of(Case.parse(text), rule_value=CASES[text], **ABOUT))


def verdict(data):
    """``accepted`` or ``rejected``, from the data."""
    try:
        recheck.check(data)
    except recheck.Rejected:
        return "rejected"
    return "accepted"


def signed(data):
    """The data with the right digest, as a forger would leave them."""
    if isinstance(data, dict):
        try:
            data["digest"] = recheck.digest(data)
        except ValueError:  # text that is no text, such as a lone surrogate
            pass
    return data


# -- the geometry -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("letter", "rank"), TYPES)
def test_root_systems(letter, rank):
    """Cartan matrices, roots and coroots are those of the geometry, which was written apart from it."""
    kind, group = CartanType(letter, rank), recheck.WeylGroup(letter, rank)
    assert tuple(map(tuple, recheck.cartan_matrix(letter, rank))) == cartan_matrix(kind)
    assert dict(zip(group.roots, group.coroots, strict=True)) == dict(positive_roots(kind))


def test_names_words_and_the_chevalley_formula():
    """On all spaces with up to 60 classes in rank at most 4: names, notations, words, and on G/B all Chevalley terms are ours."""
    seen = 0
    for X in HomogeneousSpaces(most_classes=60).up_to(5):
        letter, rank = X.kind.letter, X.rank
        group = recheck.WeylGroup(letter, rank)
        for u in X.classes:
            element = group.times(group.identity, *(i - 1 for i in u.word))
            assert group.word(element) == u.word
            text = recheck.case_text(letter, rank, X.marked, [u.word, (), u.word], (0,) * len(X.marked))
            assert text == str(Case(X, u, X.identity, u, (0,) * len(X.marked)))
            if X.is_complete:
                ours = sorted((X.classes[w].word, d, c) for w, d, c in chevalley(X).terms(u.index))
                assert sorted((group.word(w), d, c) for w, d, c in group.terms(element)) == ours
            seen += 1
    assert seen > 900


@pytest.mark.parametrize(
    "name", ["Fl(1,9;10)", "Gr(3,10)", "OG(5,10)", "D5/P4", "D5/P1,4", "OG(3,10)", "E7/P7", "C3/P1,3", "B3/P1,3"]
)
def test_names_of_larger_spaces(name):
    """Names with two digits, of half-spin varieties, and those that name type and nodes."""
    X = FlagVariety(name)
    u = X.schubert(word=(X.marked[-1],))
    zero = (0,) * len(X.marked)
    assert recheck.case_text(X.kind.letter, X.rank, X.marked, [u.word, u.word, ()], zero) == str(Case(X, u, u, X.identity, zero))


# -- soundness ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("text", CASES)
def test_accepted(text):
    """The certificates that are mutated below are accepted, with the oracle's value; so they prove something."""
    case, data = Case.parse(text), json.loads(certified(text))
    assert recheck.check(data).startswith(f"N = {constant(case.u, case.v, case.w, case.d)} at {text} (")


def places(data, path=()):
    """Every place in JSON data, as a path of keys."""
    yield path
    inner = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for key, value in inner:
        yield from places(value, (*path, key))


def mutate(data, rng):
    """Change one place at random, of every kind there is; the name of what was done."""
    path = rng.choice([path for path in places(data) if path])
    parent = data
    for key in path[:-1]:
        parent = parent[key]
    key, value = path[-1], parent[path[-1]]
    kinds = ["delete", "retype"]
    if isinstance(value, int):
        kinds += ["plus", "minus", "negate", "huge"] * 2
    if isinstance(value, str):
        kinds += ["letter", "cut", "longer"]
    if isinstance(value, list):
        kinds += ["append", "drop", "repeat", "swap", "reverse"]
    if isinstance(value, dict):
        kinds += ["add", "rename"]
    if isinstance(parent, list) and len(parent) > 1:
        kinds += ["exchange"]
    kind = rng.choice(kinds)
    match kind:
        case "delete":
            del parent[key]
        case "retype":
            parent[key] = rng.choice([None, True, "1", 1.5, [], {}, [value], {"value": value}, str(value), "\ud800"])
        case "plus" | "minus":
            parent[key] = value + (1 if kind == "plus" else -1)
        case "negate":
            parent[key] = -value
        case "huge":
            parent[key] = rng.choice([10**9, 10**39, 2**63])
        case "letter":
            spot = rng.randrange(max(len(value), 1))
            parent[key] = value[:spot] + rng.choice("0123456789abc([,.>") + value[spot + 1 :]
        case "cut":
            parent[key] = value[:-1]
        case "longer":
            parent[key] = value + rng.choice("\n 0a")
        case "append":
            value.append(rng.choice([1, 0, copy.deepcopy(value[0]) if value else 2]))
        case "drop":
            del value[: rng.randrange(2)], value[-1:]
        case "repeat":
            value.extend(copy.deepcopy(value))
        case "swap":
            if len(value) > 1:
                a, b = rng.sample(range(len(value)), 2)
                value[a], value[b] = value[b], value[a]
        case "reverse":
            value.reverse()
        case "add":
            value["note"] = 1
        case "rename":
            old = rng.choice(list(value))
            value[old + "_"] = value.pop(old)
        case "exchange":
            other = rng.choice([k for k in range(len(parent)) if k != key])
            parent[key], parent[other] = parent[other], parent[key]
    return kind


def mutants(count, seed):
    """Certificates with one to three changes each, none of which left everything as it was."""
    rng, made = random.Random(seed), 0
    while made < count:
        text = rng.choice(list(CASES))
        data = json.loads(certified(text))
        kinds = [mutate(data, rng) for _ in range(rng.choice([1, 1, 1, 2, 3])) if len(list(places(data))) > 1]
        if json.dumps(data, sort_keys=True) != json.dumps(json.loads(certified(text)), sort_keys=True):
            made += 1
            yield kinds, data


def test_every_change_is_rejected():
    """1,000 changes of all kinds to certificates, of every field: all are rejected."""
    seen = set()
    for kinds, data in mutants(1_000, "changes"):
        assert verdict(data) == "rejected", data
        seen.update(kinds)
    assert len(seen) == 17


def test_forgers_prove_only_what_is_true():
    """Of 1,000 changes signed with a new digest more than 950 are rejected by the mathematics; what is accepted is true by the oracle.

    Accepted ones change what is declared as not proven, put steps or terms in another order, or claim another true constant.
    """
    rejected = 0
    for _, data in mutants(1_000, "forgers"):
        if verdict(signed(data)) == "rejected":
            rejected += 1
            continue
        case = Case.parse(data["claim"]["text"])
        assert constant(case.u, case.v, case.w, case.d) == data["claim"]["value"]
        words = [list(x.word) for x in (case.u, case.v, case.w)]
        assert [data["claim"][name] for name in "uvw"] == words
        assert (data["claim"]["d"], data["claim"]["marked"]) == (list(case.d), list(case.X.marked))
    assert 950 < rejected < 1_000


@pytest.mark.parametrize("text", CASES)
def test_every_number_counts(text):
    """Each single number, outside the rule's value, one up or one down and signed again: rejected, or another true statement."""
    whole = json.loads(certified(text))
    numbers = [path for path in places(whole) if path and path[0] != "rule"]
    changed = rejected = 0
    for path in numbers:
        for step in (1, -1):
            data = json.loads(certified(text))
            parent = data
            for key in path[:-1]:
                parent = parent[key]
            if type(parent[path[-1]]) is not int:
                continue
            parent[path[-1]] += step
            changed += 1
            if verdict(signed(data)) == "rejected":
                rejected += 1
            else:
                case = Case.parse(data["claim"]["text"])
                assert constant(case.u, case.v, case.w, case.d) == data["claim"]["value"]
    assert changed > 40
    assert rejected == changed


def test_every_other_value_is_rejected():
    """With the same steps no other value of the constant is accepted."""
    for text in CASES:
        data = json.loads(certified(text))
        truth = data["claim"]["value"]
        for value in range(12):
            data["claim"]["value"] = value
            assert (verdict(signed(data)) == "accepted") == (value == truth)


def test_a_false_step_is_named():
    """The message names the step that is false, and the lift that is none."""
    data = json.loads(certified("LG(3,6): (2,1) * (2,1) -> (2), q^(1)"))
    data["steps"][2]["times"] += 1
    with pytest.raises(recheck.Rejected, match="step 3 is false: by the quantum Chevalley formula its two sides differ"):
        recheck.check(signed(data))
    data = json.loads(certified("Gr(3,5): (2) * (2,1) -> (), q^(1)"))
    data["lift"]["d"] = [1, 1, 1, 1]
    with pytest.raises(recheck.Rejected, match=r"expected <a, lambda> to be 0 or -1 .* got 1 at \(1, 0, 0, 0\)"):
        recheck.check(signed(data))
    data["lift"]["d"] = [0, 0, 1, 0]
    data["lift"]["w"] = []
    with pytest.raises(recheck.Rejected, match=r"expected lift.w = w w_P w_P' = \(2, 1, 4, 3\)|expected lift.w = w w_P w_P'"):
        recheck.check(signed(data))


def test_a_missing_quantum_term_is_noticed(monkeypatch):
    """A checker that forgot the quantum terms would reject what this one accepts: they are needed, and used."""
    text = "LG(3,6): (2,1) * (2,1) -> (2), q^(1)"
    honest = recheck.WeylGroup.terms
    monkeypatch.setattr(recheck.WeylGroup, "terms", lambda self, w: [term for term in honest(self, w) if not any(term[1])])
    assert verdict(json.loads(certified(text))) == "rejected"


# -- files --------------------------------------------------------------------------------------------------------------


def hostile(folder):
    """Files that are no certificates, by name: wrong types, not UTF-8, bombs; each is signed as far as that is possible."""
    good = certified("Gr(3,5): (2) * (2,1) -> (), q^(1)")

    def changed(*path, to):
        data = json.loads(good)
        parent = data
        for key in path[:-1]:
            parent = parent[key]
        parent[path[-1]] = to
        return json.dumps(signed(data)).encode()

    step = {"class": [1], "times": 1, "from": [{"divisor": [1, 0, 0, 0], "class": []}], "minus": []}
    wide = {**step, "from": [{"divisor": [1, -1, 1, -1], "class": []}] * 5_000}
    bombs = {
        "empty": b"",
        "null": b"null",
        "number": b"1" * 5_000,
        "list": b"[]",
        "latin": good.replace("my_rule", "my_r\u00fcle").encode("latin-1"),
        "utf-16": good.encode("utf-16"),
        "bom": b"\xef\xbb\xbf" + good.encode(),
        "nul": good.encode() + b"\0",
        "tail": good.encode() + b"{}",
        "deep": b"[" * 900_000,
        "deeper": b'{"a":' * 190_000,
        "nan": good.replace('"value": 1', '"value": NaN').encode(),
        "infinity": good.replace('"value": 1', '"value": -Infinity').encode(),
        "float": good.replace('"value": 1', '"value": 1.0').encode(),
        "exponent": good.replace('"value": 1', '"value": 1e999999').encode(),
        "digits": good.replace('"value": 1', f'"value": {"9" * 900_000}').encode(),
        "twice": good.replace('"value": 1', '"value": 1, "value": 1').encode(),
        "large": good.encode() + b" " * 2_000_000,
        "rank": changed("claim", "rank", to=10**9),
        "rank 10**39": changed("claim", "rank", to=10**39),
        "marked": changed("claim", "marked", to=list(range(1, 100_000))),
        "degree": changed("claim", "d", to=[999]),
        "degree huge": changed("claim", "d", to=[10**9]),
        "word": changed("claim", "u", to=[1, 2] * 50_000),
        "word not reduced": changed("claim", "u", to=[4, 4]),
        "steps": changed("steps", to=[1] * 300_000),
        "same steps": changed("steps", to=[step] * 400),
        "wide steps": changed("steps", to=[wide] * 3),
        "coefficients": changed("steps", to=[{**step, "from": [{"divisor": [10**39] * 4, "class": []}]}]),
        "surrogate": good.replace("my_rule", "\\ud800").encode(),
        "control": changed("claim", "text", to="\x1b[31maccepted\n"),
        "text": changed("claim", "text", to="Gr(3,5): (2) * (2,1) -> (), q^(2)"),
        "key": changed("note", to=1),
        "deep key": changed("claim", "note", to=1),
        "unsigned": changed("digest", to="sha256:" + "0" * 64),
        "heavy": json.dumps(heavy()).encode(),
    }
    for depth in range(900, 1_001, 4):
        bombs[f"deep {depth}"] = good.replace('"u": [4, 3]', f'"u": {"[" * depth}{"]" * depth}').encode()
    bombs["unsigned"] = good.replace('"digest": "sha256:', '"digest": "sha256:0').encode()
    for name, content in bombs.items():
        (folder / f"{name}.json").write_bytes(content)
    return [f"{name}.json" for name in bombs]


def heavy():
    """A certificate in a large group, with honest steps and far too much to multiply out."""
    group, top = recheck.WeylGroup("E", 8), (1,) * 8
    walk, rng = [group.identity], random.Random(3)
    for _ in range(65):
        walk.append(group.times(walk[-1], rng.choice([i for i in range(8) if walk[-1][i] < group.R])))
    group.work = -(10**12)
    steps = expression(group.terms, group.identity, walk[4], top, group.length, complete=True)
    u, v = list(group.word(walk[4])), list(group.word(walk[65]))
    claim = {"type": "E", "rank": 8, "marked": list(range(1, 9)), "u": u, "v": v, "w": [], "d": [1] * 8, "value": 0}
    claim["text"] = recheck.case_text("E", 8, tuple(range(1, 9)), [tuple(u), tuple(v), ()], top)
    data = {"format": recheck.FORMAT, "version": recheck.VERSION, "claim": claim, "lift": {"d": [1] * 8, "w": []}, "expand": "u"}
    data["steps"] = [
        {
            "class": list(group.word(step.x)),
            "times": step.times,
            "from": [{"divisor": list(L), "class": list(group.word(z))} for L, z in step.parts],
            "minus": [{"count": t.count, "d": list(t.d), "class": list(group.word(t.z))} for t in step.minus],
        }
        for step in steps
    ]
    return signed(data | {"rule": {"name": "x", "hash": "sha256:" + "0" * 64, "value": 1}, "conjcheck": "0.1.0"})


def limited():
    """At most 400 MB and 20 seconds of work."""
    resource.setrlimit(resource.RLIMIT_AS, (400 * 2**20, 400 * 2**20))
    resource.setrlimit(resource.RLIMIT_CPU, (20, 20))


def run(folder, *words, **options):
    """A copy of the checker, alone in a folder, without packages and without what the environment says."""
    shutil.copy(recheck.__file__, folder / "recheck.py")
    command = [sys.executable, "-I", "-S", "recheck.py", *words]
    return subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False, **options)


def test_alone(tmp_path):
    """A copy of the one file accepts all certificates without any package, with one line for each, and status 0."""
    for k, text in enumerate(CASES):
        (tmp_path / f"{k}.json").write_text(certified(text), encoding="utf-8")
    done = run(tmp_path, *(f"{k}.json" for k in range(len(CASES))))
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert len(lines) == len(CASES)
    for text, line in zip(CASES, lines, strict=True):
        assert re.fullmatch(rf"accepted: N = \d+ at {re.escape(text)} \(\d+ steps? on ../B; my_rule: .*\)", line)


def test_it_imports_nothing_but_the_standard_library():
    """The source imports standard modules only, and is one file of bounded size."""
    source = Path(recheck.__file__).read_text(encoding="utf-8")
    modules = {line.split()[1].split(".")[0] for line in source.splitlines() if re.match(r"\s*(import|from) \w+", line)}
    assert modules <= set(sys.stdlib_module_names)
    assert "import_module" not in source
    assert len(source.splitlines()) < 530


@pytest.mark.skipif(sys.platform != "linux", reason="limits of memory are kept on Linux")
def test_hostile_files(tmp_path):
    """Every hostile file is rejected with one plain line, within seconds and 400 MB, and never with a traceback."""
    names = hostile(tmp_path)
    started = time.perf_counter()
    done = run(tmp_path, *names, preexec_fn=limited)
    assert time.perf_counter() - started < 20
    assert (done.returncode, done.stderr) == (1, "")
    lines = done.stdout.splitlines()
    assert len(lines) == len(names)
    for name, line in zip(names, lines, strict=True):
        assert line.startswith("rejected: "), name
        assert len(line) < 400, name
        assert line.isprintable(), name
    assert "4,000,000 units of work" in lines[names.index("heavy.json")]


def test_data_too_deep_to_be_hashed():
    """Data that were not read from a file and are nested deeper than Python follows are rejected as well."""
    data = json.loads(certified("Gr(3,5): (2) * (2,1) -> (), q^(1)"))
    for _ in range(100_000):
        data["claim"]["u"] = [data["claim"]["u"]]
    with pytest.raises(recheck.Rejected, match="expected lists in lists four deep, got more"):
        recheck.check(data)


def test_unusable_files(tmp_path):
    """A file that is not there, a folder and wrong usage give status 2 and a line on standard error; other files are judged."""
    (tmp_path / "good.json").write_text(certified("Gr(3,5): (2) * (2,1) -> (), q^(1)"), encoding="utf-8")
    (tmp_path / "bad.json").write_text("{}", encoding="utf-8")
    done = run(tmp_path, "missing.json", ".", "good.json", "bad.json")
    assert done.returncode == 2
    assert [line.split(":")[0] for line in done.stdout.splitlines()] == ["accepted", "rejected"]
    assert [line.split(":")[0] for line in done.stderr.splitlines()] == ["unusable", "unusable"]
    assert run(tmp_path).returncode == 2
    assert run(tmp_path, "/dev/zero").returncode == 2


def test_read_never_raises_anything_else(tmp_path):
    """Random bytes and cut files are rejected, whatever they are."""
    rng = random.Random("bytes")
    good = certified("Gr(3,5): (2) * (2,1) -> (), q^(1)").encode()
    path = tmp_path / "file.json"
    for _ in range(300):
        content = bytearray(good[: rng.randrange(len(good))] if rng.random() < 0.5 else good)
        for _ in range(rng.randrange(1, 4)):
            if content:
                content[rng.randrange(len(content))] = rng.randrange(256)
        if bytes(content) == good:
            continue
        path.write_bytes(content)
        try:
            data = recheck.read(path)
        except recheck.Rejected:
            continue
        assert verdict(data) == "rejected" or data == json.loads(good)


# -- the rule again -----------------------------------------------------------------------------------------------------

RULE = """from conjcheck import Grassmannians, candidate
@candidate(on=Grassmannians())
def my_rule(X, u, v, w, d):
    return {answer}
@candidate(on=Grassmannians())
def other(X, u, v, w, d):
    raise ValueError("no")
"""


@pytest.fixture
def rule(tmp_path):
    """A certificate and the file of its rule."""
    from conjcheck.evidence.source import rule_hash

    (tmp_path / "plugin.py").write_text(RULE.format(answer=1), encoding="utf-8")
    about = {"conjecture_name": "my_rule", "rule_hash": rule_hash(tmp_path / "plugin.py")}
    found = certificate_of(Case.parse("Gr(3,5): (2) * (2,1) -> (), q^(1)"), rule_value=1, **about)
    (tmp_path / "proof.json").write_text(json.dumps(found), encoding="utf-8")
    return tmp_path


def again(folder, target="plugin.py::my_rule"):
    """Verdicts with the rule asked again."""
    return list(recheck.judge([folder / "proof.json"], str(folder / target)))[1:]


def test_the_rule_still_gives_the_value(rule):
    """The rule is asked again at the case, and its file is the one that the certificate names."""
    assert again(rule) == [(0, "rule: my_rule still gives 1 there; its file is unchanged")]


def test_the_rule_was_changed(rule):
    """A rule that gives another value now, the right one or another wrong one, is reported with status 1, and that its file has changed."""
    for answer in (0, 2):
        (rule / "plugin.py").write_text(RULE.format(answer=answer), encoding="utf-8")
        line = f"rule: my_rule now gives {answer} there, not 1; its file has changed since"
        assert again(rule) == [(1, line)]


def test_the_rule_gives_no_value(rule):
    """A rule that raises gives no value; a rule that is not there, or not a rule, is no rule to ask."""
    ((status, line),) = again(rule, "plugin.py::other")
    assert (status, line) == (1, "rule: other gives no value there now: 'crashed'; its file is unchanged")
    for target in ("plugin.py::nothing", "nothing.py::my_rule", "plugin.py"):
        ((status, line),) = again(rule, target)
        assert status == 2
        assert line.startswith("unusable: expected conjcheck to ask the rule"), line


def test_without_conjcheck(rule, monkeypatch):
    """Where conjcheck is not installed the certificate is judged all the same, and the message says what --rule needs."""
    monkeypatch.setattr(recheck.sys, "executable", sys.executable)
    real = subprocess.run
    bare = lambda command, **options: real([command[0], "-I", "-S", *command[1:]], **options)  # noqa: E731
    monkeypatch.setattr(recheck.subprocess, "run", bare)
    accepted, (status, line) = recheck.judge([rule / "proof.json"], "plugin.py::my_rule")
    assert accepted[0] == 0
    assert status == 2
    assert line.endswith("--rule needs an installed conjcheck: in its clone, pip install -e .")


def test_a_rule_that_hangs(rule, monkeypatch):
    """A rule that does not answer is given up."""
    monkeypatch.setattr(recheck, "RULE_SECONDS", 0.05)
    ((status, line),) = again(rule)
    assert (status, line) == (2, "unusable: expected the rule to answer within 0.05 seconds, got no answer")


def test_a_claim(tmp_path):
    """A claim has no value: it is still false at the case, or no longer."""
    source = "from conjcheck import CompleteFlags, claim\n@claim(on=CompleteFlags())\ndef small(X, u, v, w, d, N):\n    return {answer}\n"
    found = certificate_of(Case.parse("Fl(3): [213] * [213] -> [312]"), rule_value=None, **ABOUT)
    (tmp_path / "proof.json").write_text(json.dumps(found), encoding="utf-8")
    for answer, status, words in (("N(u, v, w, d) < 1", 0, "still false"), ("True", 1, "no longer false")):
        (tmp_path / "claims.py").write_text(source.format(answer=answer), encoding="utf-8")
        assert again(tmp_path, "claims.py") == [(status, f"rule: small is {words} there; its file has changed since")]


def test_the_case_outside_the_family():
    """A rule that does not speak about the certified space cannot be asked."""
    from conjcheck.evidence.rerun import ask_again

    target = str(Path(__file__).parents[2] / "conjectures" / "lantern_rule.py::lantern_rule")
    with pytest.raises(ConjcheckError, match="expected a case inside the family and the premise of lantern_rule"):
        ask_again(target, "Fl(3): [213] * [213] -> [312]")
