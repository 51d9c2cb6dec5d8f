"""A survey at scale gives what a plain loop gives, whoever does the work and in whatever order."""

import itertools
import json
import os
import random
import sqlite3
import threading
import time
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import replace

import pytest
from planted import cases_of, key_of
from plugins import POWERS, TABLE, load, none_left, table_of, write

from conjcheck import Fl, FlagVariety, Gr
from conjcheck.errors import LedgerError, NotationError, OutOfReach
from conjcheck.geometry.case import rows
from conjcheck.testing import campaign as room
from conjcheck.testing.campaign import Campaign, Terms, run_campaign
from conjcheck.testing.chunks import Chunk, ChunkResult, compare_chunk, entry_of
from conjcheck.testing.compare import Comparer
from conjcheck.testing.verdict import campaign_outcome

SPACES = [Gr(1, 2), Fl(3), Gr(1, 4), Gr(2, 4)]
WRONG = """
import json
from pathlib import Path
FAULTS = json.loads(Path(__file__).with_name("faults.json").read_text())

@candidate(on=Varieties("Gr(1,2)", "Fl(3)", "Gr(1,4)", "Gr(2,4)", "Fl(4)"))
def by_case(X, u, v, w, d):
    case = [str(X), u.index, v.index, w.index, list(d)]
    return known(X, u, v).get((w, d), 0) + (case in FAULTS)

@candidate(on=Varieties("Gr(1,2)", "Fl(3)", "Gr(1,4)", "Gr(2,4)"), premise=lambda X, u, v: u.length <= v.length)
def by_row(X, u, v):
    values = known(X, u, v)
    for name, a, b, w, d in FAULTS:
        if (name, a, b) == (str(X), u.index, v.index):
            key = X.classes[w], tuple(d)
            values[key] = values.get(key, 0) + 1
    return values

@claim(on=Varieties("Gr(1,2)", "Fl(3)", "Gr(1,4)", "Gr(2,4)"))
def at_most(X, u, v, w, d, N):
    return N(u, v, w, d) <= (0 if X.n == 4 and sum(d) == 1 else 1)
"""


@pytest.fixture(autouse=True)
def nothing_is_left(monkeypatch, tmp_path):
    """After each test no process is left; processes write bytecode, as they do for users."""
    monkeypatch.delenv("PYTHONDONTWRITEBYTECODE", raising=False)
    monkeypatch.setenv("CONJCHECK_TEST_MARK", tmp_path.name)
    yield
    room.close_all()
    assert none_left(tmp_path.name)


@pytest.fixture
def small_pieces(monkeypatch):
    """Every space is cut into pieces of a few rows."""
    monkeypatch.setattr("conjcheck.testing.chunks._MOST_ROWS", 5)
    monkeypatch.setattr("conjcheck.testing.chunks._SAMPLE_ROWS", 7)


def plugin(folder, faults, name):
    """A rule that is wrong at just these cases."""
    table_of(folder, SPACES)
    (folder / "faults.json").write_text(json.dumps([[str(X), u.index, v.index, w.index, list(d)] for X, u, v, w, d in faults]))
    return load(write(folder, TABLE + WRONG), name)


def faults_in(spaces, count, seed=1):
    """Some cases of each space, at random but always the same."""
    chooser = random.Random(seed)
    return [case for X in spaces for case in chooser.sample(cases_of(X), min(count, len(cases_of(X))))]


def plain(conjecture, spaces, *, every=False):
    """What a plain loop over spaces and rows counts: per space, up to the first failure unless every one is wanted."""
    comparer, found = Comparer(conjecture), []
    for X in sorted(spaces):
        total = {"seen": 0, "rows": 0, "cases": 0, "nonzero": 0, "findings": []}
        found.append((str(X), total))
        with comparer.limit:
            for row in rows(X):
                result = comparer.row(row)
                if result.finding and not every:
                    total["findings"] = [str(result.finding.where)]
                    return found
                total["seen"] += 1
                if result.finding:
                    total["findings"] += [str(f.where) for f in comparer.findings(row)[0]]
                    continue
                total["rows"] += result.cases > 0
                total["cases"] += result.cases
                total["nonzero"] += result.nonzero
    return found


def counted(campaign: Campaign, *, every=False):
    """The same of a campaign; with every failure the cases of rows that fail are left out on the other side."""
    names = ("seen",) if every else ("seen", "rows", "cases", "nonzero")
    assert campaign.problems == []
    return [
        (str(s.X), {**{n: getattr(s.result, n) for n in names}, "findings": [e["where"] for e in s.result.findings]})
        for s in campaign.spaces
    ]


def only(found, every):
    """The numbers that are compared."""
    return [(X, {k: v for k, v in total.items() if not every or k in ("seen", "findings")}) for X, total in found]


class Shuffled(Executor):
    """Does the work of others in this process, in a random order and late."""

    def __init__(self, seed):
        self.chooser, self.tasks, self.lock, self.ends = random.Random(seed), [], threading.Lock(), False
        self.comparers = {}
        self.thread = threading.Thread(target=self.work)
        self.thread.start()

    def submit(self, fn, text):
        future = Future()
        with self.lock:
            self.tasks.append((future, text))
        return future

    def work(self):
        while not self.ends:
            time.sleep(0.002)
            with self.lock:
                task = self.tasks.pop(self.chooser.randrange(len(self.tasks))) if self.tasks else None
            if task and task[0].set_running_or_notify_cancel():
                texts = task[1] if isinstance(task[1], list) else [task[1]]
                found = [self.compare(Chunk.parse(text)) for text in texts]
                task[0].set_result([*found, "[]"] if isinstance(task[1], list) else found[0])

    def compare(self, chunk):
        comparer = self.comparers.setdefault(chunk.name, None) or Comparer(load(chunk.file, chunk.name))
        self.comparers[chunk.name] = comparer
        return json.dumps(compare_chunk(comparer, chunk).as_json())

    def shutdown(self, wait=True, *, cancel_futures=False):
        self.ends = True
        self.thread.join()


@pytest.mark.parametrize("every", [False, True])
@pytest.mark.parametrize("name", ["by_case", "by_row", "at_most"])
def test_as_a_plain_loop(tmp_path, small_pieces, name, every):
    """Right or wrong, by cases, rows or claim: numbers and failures are those of a plain loop."""
    for faults in ([], faults_in([Fl(3), Gr(2, 4)], 4)):
        conjecture = plugin(tmp_path, faults, name)
        expected = plain(conjecture, SPACES, every=every)
        if name == "by_case" and every:
            assert [f for _, total in expected for f in total["findings"]] == [
                f"{X}: {u} * {v} -> {w}, q^({','.join(map(str, d))})" for X, u, v, w, d in sorted(faults, key=key_of)
            ]
        with Shuffled(1) as executor:
            done = run_campaign(conjecture, SPACES[::-1], terms=Terms(every=every), executor=executor, jobs=2)
        assert counted(done, every=every) == only(expected, every)


@pytest.mark.parametrize("jobs", [1, 2])
def test_processes_of_its_own(tmp_path, small_pieces, jobs):
    """With any number of processes, with and without a ledger, new or full, the result is one and the same."""
    conjecture = plugin(tmp_path, faults_in([Gr(2, 4)], 3), "by_case")
    expected = plain(conjecture, SPACES)
    for ledger in (None, tmp_path / "kept.sqlite", tmp_path / "kept.sqlite"):
        done = run_campaign(conjecture, SPACES, jobs=jobs, ledger=ledger)
        assert counted(done) == expected
    assert done.resumed >= sum(total["seen"] for _, total in expected)


@pytest.mark.parametrize("kind", [ThreadPoolExecutor, ProcessPoolExecutor])
def test_other_executors(tmp_path, small_pieces, kind):
    """Any executor does."""
    conjecture = plugin(tmp_path, faults_in([Gr(2, 4)], 3), "by_row")
    choices = {"mp_context": __import__("multiprocessing").get_context("spawn")} if kind is ProcessPoolExecutor else {}
    with kind(2, **choices) as executor:
        done = run_campaign(conjecture, SPACES, jobs=2, executor=executor)
    assert counted(done) == plain(conjecture, SPACES)


def test_the_minimum_whatever_the_order(tmp_path, small_pieces):
    """However the chunks come in, the failure is the smallest of all, and what is counted is all below it."""
    for seed in range(12):
        faults = faults_in([Fl(3), Gr(2, 4)], 5, seed)
        conjecture = plugin(tmp_path, faults, "by_case")
        with Shuffled(seed) as executor:
            done = run_campaign(conjecture, SPACES, executor=executor, jobs=3)
        assert counted(done) == plain(conjecture, SPACES)
        assert sum(len(s.result.findings) for s in done.spaces) == 1


def test_samples_whatever_the_order(tmp_path, small_pieces):
    """A sample is one and the same, too; a larger one begins with it, and takes over its chunks from the ledger."""
    conjecture, kept = plugin(tmp_path, faults_in([Gr(2, 4)], 9), "by_case"), tmp_path / "kept.sqlite"
    found = []
    for seed in (1, 2):
        with Shuffled(seed) as executor:
            done = run_campaign(conjecture, SPACES, terms=Terms(every=True, draws=50, seed=3), executor=executor, jobs=3)
        assert [(s.result.seen, s.of, s.complete) for s in done.spaces] == [(50, 50, True)] * 4
        found.append(counted(done))
    assert found[0] == found[1]
    with Shuffled(3) as executor:
        run_campaign(conjecture, SPACES, terms=Terms(every=True, draws=50, seed=3), executor=executor, ledger=kept)
        more = run_campaign(conjecture, SPACES, terms=Terms(every=True, draws=80, seed=3), executor=executor, ledger=kept)
    assert more.resumed == 4 * 49
    for (_, few), (_, many) in zip(found[0], counted(more), strict=True):
        assert many["findings"][: len(few["findings"])] == few["findings"]


TERMS = [
    Terms(),
    Terms(every=True),
    Terms(draws=9),
    Terms(draws=9, seed=1),
    Terms(call_limit=5.0),
    Terms(call_limit=5.0000001),
    Terms(memory=1 << 30),
    Terms(cross_check=True),
    Terms(every=True, draws=9),
]


def test_terms_share_nothing(tmp_path):
    """Work done on other terms is not inherited, though it is for the same rows."""
    conjecture, kept = plugin(tmp_path, [], "by_case"), tmp_path / "kept.sqlite"
    with Shuffled(1) as executor:
        for terms in TERMS:
            assert run_campaign(conjecture, [Fl(3)], terms=terms, executor=executor, ledger=kept).resumed == 0
        for terms in TERMS:
            assert run_campaign(conjecture, [Fl(3)], terms=terms, executor=executor, ledger=kept).resumed == (terms.draws or 36)
    assert len({terms.part for terms in TERMS}) == len(TERMS)


def test_another_rule_inherits_nothing(tmp_path, small_pieces):
    """One character of the rule changed, in the same second and of the same length: all is compared again, and it is told."""
    path, kept = write(tmp_path, POWERS), tmp_path / "kept.sqlite"
    os.utime(path, (1e9, 1e9))
    first = run_campaign(load(path), [Gr(1, 3)], ledger=kept)
    assert (first.resumed, first.stale, first.spaces[0].result.findings) == (0, (), ())
    path.write_text(path.read_text().replace("d == (1,)", "d == (2,)"))
    os.utime(path, (1e9, 1e9))
    second = run_campaign(load(path), [Gr(1, 3)], ledger=kept)
    assert second.resumed == 0
    assert second.stale == ("9 rows of Gr(1,3) were compared for another version of the rule and count no more",)
    assert second.rule != first.rule
    assert [e["where"] for e in second.spaces[0].result.findings] == ["Gr(1,3): (1) * (2) -> (), q^(1)"]


@pytest.mark.parametrize("helper", ["helper", "_helper", "pack.helper"])
def test_a_helper_of_the_same_length(tmp_path, helper):
    """A helper changed in the same second and to the same length is run as it stands, not from cached bytecode."""
    file = tmp_path / (helper.replace(".", "/") + ".py")
    path, kept = write(tmp_path, f"from {helper} import LAST\n" + POWERS.replace("(1,)", "(LAST,)")), tmp_path / "kept.sqlite"
    found = []
    for text in ("LAST = 1\n", "LAST = 2\n", "LAST = 1\n"):
        file.parent.mkdir(exist_ok=True)
        file.write_text(text)
        os.utime(file, (1e9, 1e9))
        done = run_campaign(load(path), [Gr(1, 3)], ledger=kept)
        found.append((done.resumed, len(done.spaces[0].result.findings)))
    assert found == [(0, 0), (0, 1), (9, 0)]


def test_changed_in_the_middle(tmp_path, small_pieces):
    """A plug-in that changes while it is surveyed ends the survey with a message as soon as a process reads it; what is kept is good."""
    path, kept = write(tmp_path, POWERS), tmp_path / "kept.sqlite"
    conjecture, before = load(path), path.read_text()

    def change(progress):
        if progress.done > 20:
            path.write_text(before.replace("(1,)", "(2,)"))
            room.close_all()

    done = run_campaign(conjecture, [Gr(1, 6)], ledger=kept, watching=change)
    assert len(done.problems) == 1
    assert "was changed during the survey" in done.problems[0] or "stopped" in done.problems[0]
    assert done.spaces[0].result.findings == ()
    assert not done.spaces[0].complete
    path.write_text(before)
    again = run_campaign(conjecture, [Gr(1, 6)], ledger=kept)
    assert again.resumed > 0
    assert counted(again) == plain(conjecture, [Gr(1, 6)])


def test_a_file_that_is_read_at_each_call(tmp_path, small_pieces):
    """What is compared while a data file says something else is not kept, although the file says the old thing again later."""
    reading = "    if (Path(__file__).parent / 'data' / 'right.txt').read_text() == 'no':\n        return 7\n    power ="
    path, kept = write(tmp_path, "from pathlib import Path\n" + POWERS.replace("    power =", reading)), tmp_path / "kept.sqlite"
    data = tmp_path / "data" / "right.txt"
    data.parent.mkdir()
    data.write_text("no")
    conjecture = load(path)

    def change(progress):
        data.write_text("yes")

    data.write_text("no")
    done = run_campaign(conjecture, [Gr(1, 2)], ledger=kept)
    assert done.spaces[0].result.findings
    other = run_campaign(conjecture, [Gr(1, 6)], ledger=kept, watching=change, terms=Terms(every=True))
    assert "was changed during the survey" in other.problems[0]
    data.write_text("no")
    again = run_campaign(conjecture, [Gr(1, 6)], ledger=kept, terms=Terms(every=True))
    assert again.spaces[0].result.failing > 30


REMEMBERING = """
seen = {}

@candidate(on=ProjectiveSpaces())
def remembering(X, u, v):
    last = seen.get((X.n, u.index, v.index - 1), seen.get((X.n, u.index - 1, v.index)))
    if last is None and (u.index or v.index):
        return {}
    w, d = (0, 0) if last is None else last
    seen[X.n, u.index, v.index] = w, d = (w, d) if last is None else (w + 1, d) if w + 1 < X.n else (0, d + 1)
    return {(X.classes[w], (d,)): 1}
"""
"""Right as long as rows are asked in order, since each answer is made from an earlier one."""


@pytest.mark.parametrize("jobs", [1, 2])
def test_a_rule_that_lives_on_its_earlier_answers(tmp_path, jobs):
    """Rows are asked again, in another order, by a process that was asked nothing before; a right rule passes."""
    spaces = [Gr(1, n) for n in range(2, 8)]
    done = run_campaign(load(write(tmp_path, REMEMBERING)), spaces, jobs=jobs)
    assert all(space.complete and not space.result.findings for space in done.spaces)
    assert (done.again["status"], done.again["rule"]) == ("refuted", 0)
    (tmp_path / "other").mkdir()
    assert run_campaign(load(write(tmp_path / "other", POWERS)), spaces, jobs=jobs).again is None


def test_what_a_rule_reads(tmp_path):
    """A file whose name is made up while the rule runs is not in its hash, and is told; one that a string names is, and is not."""
    reading = "    assert (Path(__file__).parent / f'table{X.n}.txt').read_text(), 'table3.txt'\n    power ="
    path = write(tmp_path, "from pathlib import Path\n" + POWERS.replace("    power =", reading))
    for n in (2, 3, 4):
        (tmp_path / f"table{n}.txt").write_text("x")
    done = run_campaign(load(path), [Gr(1, n) for n in (2, 3, 4)])
    assert done.again is None
    assert done.unseen == ("table2.txt", "table4.txt")
    note = campaign_outcome(done).note
    assert note.startswith("the rule reads table2.txt, table4.txt, which its hash does not see: a change there would go unnoticed")


class Liar(Shuffled):
    """Answers with something else."""

    def __init__(self, answer):
        self.answer = answer
        super().__init__(1)

    def compare(self, chunk):
        honest = json.loads(super().compare(chunk))
        return self.answer(honest) if chunk.first == 10 else json.dumps(honest)


@pytest.mark.parametrize(
    "answer",
    [
        lambda r: json.dumps({**r, "seen": 4}),
        lambda r: json.dumps({**r, "seen": 6}),
        lambda r: json.dumps({**r, "seen": 0, "rows": 0, "cases": 0, "nonzero": 0, "before": 0}),
        lambda r: json.dumps({**r, "ended": True, "seen": 3}),
        lambda r: json.dumps(None),
        lambda r: "lantern",
        lambda r: "",
        lambda r: json.dumps({k: v for k, v in r.items() if k != "findings"}),
    ],
)
def test_results_that_are_not_whole(tmp_path, small_pieces, answer):
    """A result that is not one of all rows of its chunk is a problem: never a gap, never a row twice."""
    conjecture = plugin(tmp_path, [], "by_case")
    with Liar(answer) as executor:
        done = run_campaign(conjecture, [Fl(3)], executor=executor, jobs=2, ledger=tmp_path / "kept.sqlite")
    assert "rows 10 to 15" in done.problems[0]
    assert done.spaces[0].result.seen == 10
    assert not done.spaces[0].complete
    with Shuffled(1) as executor:
        again = run_campaign(conjecture, [Fl(3)], executor=executor, jobs=2, ledger=tmp_path / "kept.sqlite")
    assert again.resumed < 36
    assert counted(again) == plain(conjecture, [Fl(3)])


def test_an_executor_that_fails(tmp_path, small_pieces):
    """What an executor raises is a problem that names the rows; work after it does not count."""

    class Failing(Shuffled):
        def compare(self, chunk):
            if chunk.first == 10:
                raise OSError("the network is down")
            return super().compare(chunk)

        def work(self):
            while not self.ends:
                time.sleep(0.002)
                with self.lock:
                    task = self.tasks.pop() if self.tasks else None
                if task and task[0].set_running_or_notify_cancel():
                    try:
                        task[0].set_result(self.compare(Chunk.parse(task[1])))
                    except OSError as error:
                        task[0].set_exception(error)

    with Failing(1) as executor:
        done = run_campaign(plugin(tmp_path, [], "by_case"), [Fl(3)], executor=executor, jobs=2)
    assert done.problems == ["Fl(3), rows 10 to 15: OSError: the network is down"]
    assert done.spaces[0].result.seen == 10


@pytest.mark.parametrize("text", ['{"seen": 9}', None])
def test_a_ledger_that_says_something_else(tmp_path, text):
    """A line of the ledger that was changed, with or without its digest, ends the survey with a message that names file and rows."""
    from conjcheck.evidence.ledger import ChunkKey, Ledger, _digest, library_mark

    conjecture, kept = plugin(tmp_path, [], "by_case"), tmp_path / "kept.sqlite"
    with Shuffled(1) as executor:
        done = run_campaign(conjecture, [Fl(3)], executor=executor, ledger=kept)
        key = ChunkKey(done.rule, "by_case", library_mark(), "Fl(3)", Terms().part, 0, 36)
        with Ledger(kept) as ledger:
            good = ledger.get(key)
        text = text or json.dumps({**good, "seen": 35})
        base = sqlite3.connect(kept)
        base.execute("UPDATE chunks SET result = ?, digest = ?", (text, _digest(key, text)))
        base.commit()
        base.close()
        with pytest.raises(LedgerError, match=r"kept.sqlite: damaged: expected the result of"):
            run_campaign(conjecture, [Fl(3)], executor=executor, ledger=kept)


def test_progress(tmp_path, small_pieces):
    """The watcher is told of every row once, up to all."""
    conjecture, kept, seen = plugin(tmp_path, [], "by_case"), tmp_path / "kept.sqlite", []
    for _ in range(2):
        seen.clear()
        with Shuffled(1) as executor:
            run_campaign(conjecture, SPACES, executor=executor, jobs=2, ledger=kept, watching=seen.append)
        assert (seen[-1].done, seen[-1].of) == (92, 92)
        assert all(a.done < b.done for a, b in itertools.pairwise(seen))
    assert seen[-1].resumed == 92


def test_refusals(tmp_path):
    """Refused are: no space, a space outside the family or out of reach, and a rule that is in no file."""
    conjecture = load(write(tmp_path, POWERS))
    with pytest.raises(NotationError, match="expected at least one flag variety to survey, got none"):
        run_campaign(conjecture, [])
    with pytest.raises(NotationError, match=r"expected flag varieties of the family of powers .*, got Gr\(2,4\)"):
        run_campaign(conjecture, [Gr(1, 3), Gr(2, 4)])
    far = load(write(tmp_path, '@candidate(on=Varieties("E8/B"))\ndef far(X, u, v, w, d):\n    return 0\n', "far.py"))
    with pytest.raises(OutOfReach, match=r"expected spaces in reach of some engine, got E8/B.*by --most-classes 1000$"):
        run_campaign(far, [FlagVariety("E8/B")])
    path = tmp_path / "gone.py"
    path.write_text((tmp_path / "rule.py").read_text())
    gone = load(path)
    path.unlink()
    with pytest.raises(NotationError, match="expected a conjecture in a file, got powers"):
        run_campaign(gone, [Gr(1, 3)])


def test_variants(tmp_path):
    """A variant is not surveyed under the name, and with the source, of the rule as it stands."""
    source = """
    @candidate(on=ProjectiveSpaces(), variants={"last": (1, 2)})
    def rule(X, u, v, w, d, *, last=1):
        power = u.length + v.length
        return int((w.length, d) == ((power, (0,)) if power < X.n else (power - X.n, (last,))))
    """
    conjecture = load(write(tmp_path, source))
    with pytest.raises(NotationError, match="expected the rule rule as it stands, got last=2"):
        run_campaign(conjecture.variant(last=2), [Gr(1, 3)])
    assert run_campaign(conjecture.variant(last=1), [Gr(1, 3)]).spaces[0].complete


def test_the_engine(tmp_path):
    """The engine named is the one that answers: localisation for equivariant constants."""
    source = """
    @candidate(on=ProjectiveSpaces(), ring="equivariant quantum", premise=lambda X, u, v: u.length == 0)
    def unit(X, u, v, w, d):
        return int(v == w and d == (0,))
    """
    done = run_campaign(load(write(tmp_path, source)), [Gr(1, 3)])
    assert [(s.engine, s.complete, s.result.rows, s.result.findings) for s in done.spaces] == [("localisation", True, 3, ())]
    done = run_campaign(load(write(tmp_path, POWERS, "other.py")), [Gr(1, 3)])
    assert [s.engine for s in done.spaces] == ["vafa-intriligator"]


def test_every_entry_is_a_finding(tmp_path):
    """What a campaign keeps of a failure is what the comparison in this process finds."""
    conjecture = plugin(tmp_path, faults_in([Gr(2, 4)], 3), "by_case")
    done = run_campaign(conjecture, [Gr(2, 4)], terms=Terms(every=True))
    comparer = Comparer(conjecture)
    with comparer.limit:
        found = [entry_of(f) for row in rows(Gr(2, 4)) for f in comparer.findings(row)[0]]
    assert [*done.spaces[0].result.findings] == found
    assert replace(done.spaces[0].result, seconds=0.0) == replace(
        ChunkResult.parse(json.loads(json.dumps(done.spaces[0].result.as_json()))), seconds=0.0
    )
