"""What a rule does to its process: each end becomes a finding at its case, and the survey goes on."""

import json
import os
import signal
import threading
import time
from dataclasses import replace
from itertools import islice

import pytest
from planted import cases_of
from plugins import none_left, write

from conjcheck import FlagVariety
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import Row, rows
from conjcheck.testing import isolation
from conjcheck.testing.chunks import Chunk, ChunkResult
from conjcheck.testing.isolation import close_all, isolated

X = FlagVariety("Gr(1,3)")
"""Nine rows; the fifth, ``(1) * (1)``, has one case, and the last, ``(2) * (2)``, too."""

PREAMBLE = """
import builtins, ctypes, itertools, os, signal, subprocess, sys, time
from conjcheck import CompleteFlags, ProjectiveSpaces, candidate

def right(X, u, v, w, d):
    power = u.length + v.length
    return int((w.length, d) == ((power, (0,)) if power < X.n else (power - X.n, (1,))))

PLACES = {{(0, 0): 0, (0, 1): 1, (1, 0): 2, (0, 2): 3, (1, 1): 4, (2, 0): 5, (1, 2): 6, (2, 1): 7, (2, 2): 8}}

def bad(*words):
    {body}

@candidate(on=ProjectiveSpaces())
def by_case(X, u, v, w, d):
    if (u.length, v.length) == (1, 1) or EVERYWHERE:
        bad(PLACES[u.length, v.length])
    return right(X, u, v, w, d)

@candidate(on=ProjectiveSpaces())
def by_row(X, u, v):
    if (u.length, v.length) == (1, 1) or EVERYWHERE:
        bad(PLACES[u.length, v.length])
    power = u.length + v.length
    return {{(X.of_length(power % X.n)[0], (power // X.n,)): 1}}
"""


@pytest.fixture(autouse=True)
def nothing_is_left(monkeypatch, tmp_path):
    """Processes are marked; after each test none is left, and no file of theirs."""
    monkeypatch.setenv("CONJCHECK_TEST_MARK", tmp_path.name)
    (tmp_path / "files").mkdir()
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path / "files"))
    yield
    close_all()
    assert none_left(tmp_path.name)
    assert list((tmp_path / "files").iterdir()) == []


@pytest.fixture
def compare(monkeypatch, tmp_path):
    """``compare(body, name, ...)``: what comparing all rows of Gr(1,3) gives if the rule does that at the fifth row."""
    monkeypatch.setattr(isolation, "_GRACE", 0.5)

    def run(body, name="by_case", **choices):
        lines = body.strip("\n").splitlines()
        source = PREAMBLE.replace("EVERYWHERE", str("words ==" in body))
        path = write(tmp_path, source.format(body="\n    ".join(lines)), head="")
        chunk = Chunk(
            str(path), name, rule_hash(path), "quantum", X.name, None, 0, 9, **{"every": True, "call_limit": 1.0, **choices}
        )
        return ChunkResult.parse(json.loads(isolated(chunk.as_text())))

    return run


def the_row():
    """The row in which the rules of these tests do something."""
    return next(islice(rows(X), 4, 5))


NASTY = {
    "os._exit": ("os._exit(0)", "crashed", "the process of the rule ended itself, with status 0"),
    "os._exit(7)": ("os._exit(7)", "crashed", "the process of the rule ended itself, with status 7"),
    "sys.exit": ("sys.exit(0)", "crashed", "SystemExit: 0"),
    "SystemExit": ("raise SystemExit", "crashed", "SystemExit"),
    "KeyboardInterrupt": ("raise KeyboardInterrupt", "crashed", "the process of the rule was ended by SIGINT"),
    "GeneratorExit": ("raise GeneratorExit", "crashed", "GeneratorExit"),
    "SIGKILL": ("os.kill(os.getpid(), signal.SIGKILL)", "crashed", "was ended by SIGKILL (out of memory?)"),
    "SIGTERM": ("os.kill(os.getpid(), signal.SIGTERM)", "crashed", "was ended by SIGTERM"),
    "abort": ("os.abort()", "crashed", "was ended by SIGABRT"),
    "segfault": ("ctypes.string_at(0)", "crashed", "was ended by SIGSEGV"),
    "recursion": ("bad(*words)", "crashed", "RecursionError"),
    "hang": ("while True: pass", "too-slow", "one call took longer than 0.3 s"),
    "sleep": ("time.sleep(1000)", "too-slow", "one call took longer than 0.3 s"),
    "swallow": (
        "while True:\n    try:\n        while True: pass\n    except BaseException: pass",
        "too-slow",
        "one call took longer than 0.3 s",
    ),
    "deaf": (
        "signal.pthread_sigmask(signal.SIG_BLOCK, [signal.SIGALRM])\ntime.sleep(1000)",
        "too-slow",
        "one call took longer than 0.3 s and could not be interrupted",
    ),
    "in C": ("sum(itertools.repeat(1))", "too-slow", "one call took longer than 0.3 s and could not be interrupted"),
    "close everything": ("os.closerange(3, 256)\nos._exit(3)", "crashed", "with status 3"),
}


@pytest.mark.slow
@pytest.mark.parametrize("name", ["by_case", "by_row"])
@pytest.mark.parametrize("kind", NASTY)
def test_what_ends_a_call(compare, kind, name):
    """It is recorded at its case, or at its row for a rule that answers by rows; all other rows are compared."""
    body, status, words = NASTY[kind]
    found = compare(body, name, call_limit=0.3)
    (entry,) = found.findings
    assert entry["status"] == status
    assert words in entry["detail"]
    assert entry["where"] == str(the_row()) + (" -> (2), q^(0)" if name == "by_case" else "")
    assert (found.seen, found.rows, found.cases, found.nonzero) == (9, 8, 8, 8)
    assert (found.failing_rows, found.failing, found.before) == (1, 1, 4)
    assert not found.problem


@pytest.mark.parametrize(
    ("name", "kinds"),
    [
        ("by_case", ["os._exit", "sys.exit", "SIGKILL", "segfault", "recursion", "sleep", "in C"]),
        ("by_row", ["os._exit(7)", "deaf"]),
    ],
)
def test_one_after_the_other(compare, name, kinds):
    """A rule that does something else in every row: each end is recorded at its place, in order, and the others are compared."""
    bodies = "".join(
        f"if words == ({k},):\n" + "".join(f"    {line}\n" for line in NASTY[kind][0].splitlines())
        for k, kind in enumerate(kinds, 1)
    )
    found = compare(bodies, name, call_limit=0.3)
    places = list(rows(X))[1 : len(kinds) + 1]
    assert [entry["where"].split(" ->")[0] for entry in found.findings] == list(map(str, places))
    assert [entry["status"] for entry in found.findings] == [NASTY[kind][1] for kind in kinds]
    for entry, kind in zip(found.findings, kinds, strict=True):
        assert NASTY[kind][2] in entry["detail"]
        assert (" -> " in entry["where"]) == (name == "by_case")
    assert (found.seen, found.cases, found.failing_rows, found.failing) == (9, 9 - len(kinds), len(kinds), len(kinds))


def test_memory(compare):
    """A rule that eats memory crashes alone, at its case, and what is allowed is kept."""
    found = compare("a = []\nwhile True: a.append(bytearray(10_000_000))", memory=int(0.3 * 2**30), call_limit=20.0)
    assert [(entry["status"], entry["detail"]) for entry in found.findings] == [("crashed", "MemoryError")]
    assert (found.seen, found.cases) == (9, 8)


@pytest.mark.parametrize("kind", ["os._exit", "sleep"])
def test_the_first_failure_ends_it(compare, kind):
    """Unless every failure is wanted, the rows before it are counted, and no later one."""
    found = compare(NASTY[kind][0], every=False, call_limit=0.3)
    assert (found.seen, found.cases, found.before, found.ended) == (4, 4, 4, True)
    assert (found.failing, len(found.findings)) == (1, 1)
    assert found.covers(0, 9)


HARMLESS = {
    "prints": "print('lantern ' * 500_000)\nsys.stderr.write('lantern ' * 500_000)",
    "garbage on its output": 'os.write(1, b\'{"seen": 9}\\n\')\nprint(\'{"task": 1, "again": false, "result": {}}\', flush=True)\n'
    "subprocess.run(['echo', '{}'])",
    "reads": "assert sys.stdin.read() == ''",
    "reads by line": "assert sys.stdin.readline() == ''",
    "closes 0, 1, 2": "[os.close(k) for k in (0, 1, 2)]",
    "changes folder": "os.chdir('/')",
    "a child": "pid = os.fork()\nif not pid: os._exit(0)\nos.waitpid(pid, 0)",
    "a child that goes on": "globals().setdefault('forked', os.fork())",
    "a child that stays": "if not os.fork():\n    time.sleep(1000)",
    "a program that stays": "subprocess.Popen(['sleep', '1000'])",
    "ignores signals": "[signal.signal(k, signal.SIG_IGN) for k in (signal.SIGTERM, signal.SIGINT, signal.SIGHUP)]",
    "replaces what it needs not": "builtins.open = builtins.print = builtins.input = None",
    "a thread that stays": "import threading\nthreading.Thread(target=time.sleep, args=(1000,)).start()",
    "sets the alarm": "signal.signal(signal.SIGALRM, signal.SIG_IGN)",
}


@pytest.mark.slow
@pytest.mark.parametrize("name", ["by_case", "by_row"])
@pytest.mark.parametrize("kind", HARMLESS)
def test_what_does_no_harm(compare, kind, name):
    """Odd, but a function: all nine rows agree."""
    found = compare(HARMLESS[kind], name)
    assert (found.findings, found.problem) == ((), "")
    assert (found.seen, found.cases, found.nonzero) == (9, 9, 9)


@pytest.mark.parametrize("name", ["by_case", "by_row"])
def test_all_that_does_no_harm(compare, name):
    """All of these one after the other: all nine rows agree."""
    found = compare("\n".join(HARMLESS.values()), name)
    assert (found.findings, found.problem) == ((), "")
    assert (found.seen, found.cases, found.nonzero) == (9, 9, 9)


def test_builtins_that_raise(compare):
    """A rule that breaks what the comparison needs itself does not come out as right."""
    found = compare("builtins.sorted = builtins.isinstance = builtins.len = builtins.bool = None", every=False)
    assert found.findings or found.problem
    assert found.seen < 9


TWO = """
from conjcheck import CompleteFlags, candidate
import os

@candidate(on=CompleteFlags())
def rule(X, u, v, w, d):
    if u.length == v.length == 2 and u.index == v.index == 3:
        if w.length == 4 and not any(d):
            return 5
        if sum(d) == 2:
            os._exit(1)
    from planted import truth
    return KNOWN[u, v].get((w, d), 0)

from planted import truth
from conjcheck import Fl
KNOWN = truth(Fl(3))
"""


def test_a_row_that_differs_and_dies(tmp_path):
    """In a row in which a case differs before another one ends the process, both are found, in order: the smaller is not lost."""
    source = TWO.replace("from planted import truth\n    return", "return").replace("w.length == 4 and not any(d)", "sum(d) == 1")
    path = write(tmp_path, source, head="")
    space = FlagVariety("Fl(3)")
    chunk = Chunk(str(path), "rule", rule_hash(path), "quantum", space.name, None, 0, 36, every=True)
    found = ChunkResult.parse(json.loads(isolated(chunk.as_text())))
    (row,) = [row for row in rows(space) if (row.u.index, row.v.index) == (3, 3)]
    inside = [c for c in cases_of(space) if c[1:3] == (row.u, row.v)]
    differing = [f"{row} -> {w}, q^({d[0]},{d[1]})" for _, _, _, w, d in inside if sum(d) == 1]
    dying = next(f"{row} -> {w}, q^({d[0]},{d[1]})" for _, _, _, w, d in inside if sum(d) == 2)
    assert [(e["status"], e["where"]) for e in found.findings] == [*(("refuted", where) for where in differing), ("crashed", dying)]
    assert differing
    assert (found.seen, found.failing_rows, found.failing) == (36, 1, len(differing) + 1)
    assert found.cases == len(cases_of(space)) - len(inside)


SLOWLY = """
import time
@candidate(on=ProjectiveSpaces())
def slowly(X, u, v, w, d):
    time.sleep(0.004)
    power = u.length + v.length
    return int((w.length, d) == ((power, (0,)) if power < X.n else (power - X.n, (1,))))
"""


@pytest.mark.parametrize("way", [signal.SIGKILL, pytest.param(signal.SIGTERM, marks=pytest.mark.slow), signal.SIGSTOP])
def test_killed_from_outside(tmp_path, monkeypatch, way):
    """A process that somebody else kills, or stops, in the middle is replaced: no finding, and everything is compared."""
    monkeypatch.setattr(isolation, "_GRACE", 0.5)
    path = write(tmp_path, SLOWLY)
    chunk = Chunk(str(path), "slowly", rule_hash(path), "quantum", "Gr(1,10)", None, 0, 100, call_limit=0.5)
    answers = []
    thread = threading.Thread(target=lambda: answers.append(isolated(chunk.as_text())))
    thread.start()
    hit = []
    while thread.is_alive() and len(hit) < 2:
        time.sleep(0.01)
        for process in list(isolation._all):
            if process.lives and process.pid not in hit and process._marks.read()[1] in range(20 + 30 * len(hit), 90):
                os.kill(process.pid, way)
                hit.append(process.pid)
    thread.join(30)
    close_all()
    assert len(hit) == 2
    found = ChunkResult.parse(json.loads(answers[0]))
    assert (found.seen, found.cases, found.findings, found.problem) == (100, 100, (), "")


def test_killed_between_two_chunks(tmp_path):
    """An idle process that somebody kills is replaced, as often as it happens."""
    path = write(tmp_path, SLOWLY)
    chunk = Chunk(str(path), "slowly", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
    for _ in range(3):
        found = ChunkResult.parse(json.loads(isolated(chunk.as_text())))
        assert (found.seen, found.findings, found.problem) == (9, (), "")
        os.kill(isolation._here.process.pid, signal.SIGKILL)


def test_only_in_company(tmp_path):
    """A row in which the process ends only after many others is no finding: that is a problem, with its words."""
    source = """
    import os
    CALLS = []
    @candidate(on=ProjectiveSpaces())
    def rule(X, u, v):
        CALLS.append(1)
        if len(CALLS) > 6:
            os._exit(5)
        return {(X.of_length((u.length + v.length) % X.n)[0], ((u.length + v.length) // X.n,)): 1}
    """
    path = write(tmp_path, source)
    chunk = Chunk(str(path), "rule", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
    found = ChunkResult.parse(json.loads(isolated(chunk.as_text())))
    assert (found.findings, found.seen) == ((), 0)
    assert found.problem.endswith("ended itself, with status 5, 3 times, but not in a row that was compared alone")


def test_a_fresh_process_after_a_leak(tmp_path):
    """What earlier chunks took of the memory is not held against a later one."""
    source = """
    LEAK = []
    @candidate(on=ProjectiveSpaces())
    def leaks(X, u, v, w, d):
        LEAK.append(bytearray(6_000_000))
        power = u.length + v.length
        return int((w.length, d) == ((power, (0,)) if power < X.n else (power - X.n, (1,))))
    """
    path = write(tmp_path, source)
    whole = Chunk(str(path), "leaks", rule_hash(path), "quantum", "Gr(1,5)", None, 0, 25, memory=int(0.2 * 2**30))
    for k in range(0, 25, 5):
        for _ in range(2):
            found = ChunkResult.parse(json.loads(isolated(whole.part(k, k + 5).as_text())))
            assert (found.seen, found.findings, found.problem) == (5, (), "")


def test_the_oracle_is_not_the_rule(tmp_path):
    """What the oracle raises is a problem, with its words, and no finding."""
    source = """
    import conjcheck.testing.compare as room
    from conjcheck.errors import EnginesDisagree, OutOfReach
    @candidate(on=ProjectiveSpaces())
    def rule(X, u, v):
        return {(X.of_length((u.length + v.length) % X.n)[0], ((u.length + v.length) // X.n,)): 1}
    honest = room.row_terms
    def doubtful(u, v, **choices):
        if u.length == v.length == 1:
            raise KIND("two values")
        return honest(u, v, **choices)
    room.row_terms = doubtful
    """
    for kind in ("EnginesDisagree", "MemoryError"):
        path = write(tmp_path, source.replace("KIND", kind), f"rule_{kind}.py")
        chunk = Chunk(str(path), "rule", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
        found = ChunkResult.parse(json.loads(isolated(chunk.as_text())))
        assert found.findings == ()
        assert ("the oracle needs more" if kind == "MemoryError" else "two values") in found.problem


def test_another_source(tmp_path):
    """A file that is not as it was when the survey began is a problem; and so is one without the conjecture, or that is broken."""
    path = write(tmp_path, SLOWLY)
    good = Chunk(str(path), "slowly", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
    for text, words in (
        (good.as_text().replace("sha256:", "sha256:0"), "as it was when the survey began"),
        (good.as_text().replace('"slowly"', '"quickly"'), "expected a conjecture 'quickly'"),
        (replace(good, library="0.0.1+abc").as_text(), "expected conjcheck 0.0.1+abc on all machines of a survey, got "),
    ):
        found = ChunkResult.parse(json.loads(isolated(text)))
        assert words in found.problem
        assert found.seen == 0
    path.write_text("raise ValueError('lantern')")
    broken = Chunk(str(path), "slowly", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
    assert "lantern" in ChunkResult.parse(json.loads(isolated(broken.as_text()))).problem


def test_a_long_import(tmp_path, monkeypatch):
    """A file whose import takes longer than a call may take is not taken for a rule that hangs."""
    monkeypatch.setattr(isolation, "_GRACE", 0.2)
    path = write(tmp_path, "import time\nuntil = time.time() + 2\nwhile time.time() < until: pass\n" + SLOWLY)
    chunk = Chunk(str(path), "slowly", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9, call_limit=0.5)
    found = ChunkResult.parse(json.loads(isolated(chunk.as_text())))
    assert (found.seen, found.problem) == (9, "")


def test_modules_are_found_as_here(tmp_path, monkeypatch):
    """The process finds modules where this one does, and not in the folder where it happens to be started."""
    (tmp_path / "elsewhere").mkdir()
    (tmp_path / "elsewhere" / "far_helper.py").write_text("ONE = 1\n")
    (tmp_path / "cwd").mkdir()
    (tmp_path / "cwd" / "struct.py").write_text("raise ValueError('the wrong module')\n")
    monkeypatch.syspath_prepend(str(tmp_path / "elsewhere"))
    monkeypatch.chdir(tmp_path / "cwd")
    path = write(tmp_path, "from far_helper import ONE\n" + SLOWLY)
    chunk = Chunk(str(path), "slowly", rule_hash(path), "quantum", "Gr(1,3)", None, 0, 9)
    assert ChunkResult.parse(json.loads(isolated(chunk.as_text()))).seen == 9


def test_a_row_is_the_place(tmp_path):
    """The row named is the one at that place of the chunk, also in a sample."""
    source = """
    import os
    @candidate(on=ProjectiveSpaces())
    def rule(X, u, v):
        if (u.length, v.length) == (2, 1):
            os._exit(1)
        return {(X.of_length((u.length + v.length) % X.n)[0], ((u.length + v.length) // X.n,)): 1}
    """
    path = write(tmp_path, source)
    chunk = Chunk(str(path), "rule", rule_hash(path), "quantum", "Gr(1,3)", 5, 0, 20, every=True)
    found = ChunkResult.parse(json.loads(isolated(chunk.as_text())))
    assert {entry["where"] for entry in found.findings} == {"Gr(1,3): (2) * (1)"}
    assert found.seen == 20
    assert 0 < found.failing < 5
    assert found.rows == 20 - found.failing
    assert Row.parse(found.findings[0]["where"]).u.length == 2
