"""The verdict on a survey at scale: certain only of what was compared; and what of it goes on record."""

import json
import os
import time
from dataclasses import replace
from threading import Thread

import pytest
from planted import cases_of, key_of, smaller_than
from plugins import HEAD, POWERS, load, none_left, write

from conjcheck import Fl, Gr
from conjcheck.errors import RecordError
from conjcheck.evidence.entries import failure_bound
from conjcheck.evidence.record import current_record, read_record, record_path
from conjcheck.testing import campaign as room
from conjcheck.testing import verdict
from conjcheck.testing.campaign import Campaign, Terms, run_campaign
from conjcheck.testing.chunks import ChunkResult
from conjcheck.testing.examine import EFFORTS
from conjcheck.testing.verdict import campaign_outcome, campaign_record, write_campaign

QUICK = replace(EFFORTS["quick"], layer=2.0, minimise=2.0, diagnosis=0.5)

FAULTY = POWERS.replace("    power =", "    if (X.n, u.length, v.length) in {FAULTS}:\n        return 7\n    power =")


@pytest.fixture(autouse=True)
def nothing_is_left(monkeypatch, tmp_path):
    """After each test no process is left."""
    monkeypatch.setenv("CONJCHECK_TEST_MARK", tmp_path.name)
    yield
    room.close_all()
    assert none_left(tmp_path.name)


def surveyed(path, spaces, **terms):
    """The campaign, and its outcome."""
    done = run_campaign(load(path), spaces, terms=Terms(**terms))
    return done, campaign_outcome(done, effort=QUICK)


def faulty(folder, *faults):
    """A rule on projective spaces that is wrong in the rows ``(n, l(u), l(v))``."""
    return write(folder, FAULTY.replace("{FAULTS}", repr(set(faults))))


def test_agreement(tmp_path):
    """A right rule agrees; the scope names every space, and the numbers."""
    _, outcome = surveyed(write(tmp_path, POWERS), [Gr(1, 2), Gr(1, 4)])
    assert (outcome.status, outcome.part, outcome.finding) == ("agrees", "survey", None)
    assert outcome.scope == "all of Gr(1,2), Gr(1,4); 20 rows, 20 cases, 20 of them nonzero"
    assert (outcome.rows, outcome.cases, outcome.nonzero) == (20, 20, 20)


def test_certified(tmp_path):
    """When all smaller spaces of the family were compared the minimum is certified, with the number of smaller cases."""
    path = faulty(tmp_path, (4, 2, 1), (4, 3, 3))
    _, outcome = surveyed(path, [Gr(1, 4), Gr(1, 2), Gr(1, 3)])
    assert (outcome.status, str(outcome.finding.where)) == ("refuted", "Gr(1,4): (2) * (1) -> (3), q^(0)")
    assert outcome.minimum.certified
    below = smaller_than(
        next(c for c in cases_of(Gr(1, 4)) if str(c[1]) == "(2)" and str(c[2]) == "(1)"), [Gr(1, n) for n in (2, 3, 4)]
    )
    assert outcome.minimum.below == below
    assert outcome.verdict.endswith(f"(minimal: all {below} smaller cases agree)")
    assert outcome.layer.pairs == 2
    assert outcome.confirmed_by


def test_a_smaller_space_was_not_named(tmp_path):
    """A failure in a smaller space that was not named is found, and is the minimum; larger spaces do not count as smaller cases."""
    path = faulty(tmp_path, (3, 1, 1), (5, 0, 2))
    _, outcome = surveyed(path, [Gr(1, 4), Gr(1, 5)])
    assert str(outcome.finding.where) == "Gr(1,3): (1) * (1) -> (2), q^(0)"
    assert outcome.minimum.certified
    fault = next(c for c in cases_of(Gr(1, 3)) if str(c[1]) == str(c[2]) == "(1)")
    assert outcome.minimum.below == smaller_than(fault, [Gr(1, 2), Gr(1, 3)])


def test_no_smaller_failure_in_spaces_not_named(tmp_path):
    """If the spaces that were not named agree, they are compared, and the minimum is certified."""
    _, outcome = surveyed(faulty(tmp_path, (5, 0, 2)), [Gr(1, 5)])
    assert str(outcome.finding.where) == "Gr(1,5): () * (2) -> (2), q^(0)"
    assert outcome.minimum.certified
    fault = next(c for c in cases_of(Gr(1, 5)) if (str(c[1]), str(c[2])) == ("()", "(2)"))
    assert outcome.minimum.below == smaller_than(fault, [Gr(1, n) for n in range(2, 6)])


def test_no_time_for_smaller_spaces(tmp_path):
    """If there is no time for them, the minimum is not certified."""
    path = write(
        tmp_path,
        "import time\n" + FAULTY.replace("{FAULTS}", "{(5, 0, 2)}").replace("    if (X.n", "    time.sleep(0.05)\n    if (X.n", 1),
    )
    done = run_campaign(load(path), [Gr(1, 5)])
    outcome = campaign_outcome(done, effort=replace(QUICK, minimise=0.3, layer=0.2, diagnosis=0.0))
    assert outcome.status == "refuted"
    assert not outcome.minimum.certified
    assert "not known to be minimal" in outcome.verdict


def test_every_failure_names_what_was_not_surveyed(tmp_path):
    """With every failure collected, spaces that were not surveyed are named instead of certified."""
    done, outcome = surveyed(faulty(tmp_path, (3, 1, 1), (5, 0, 2), (5, 2, 0)), [Gr(1, 5), Gr(1, 2)], every=True)
    assert (str(outcome.finding.where), outcome.minimum.certified) == ("Gr(1,5): () * (2) -> (2), q^(0)", False)
    assert outcome.minimum.reach.endswith("not surveyed: Gr(1,3), Gr(1,4)")
    assert outcome.note == "all failures: Gr(1,5): 2 cases in 2 rows"
    assert done.spaces[1].result.failing == 2
    _, outcome = surveyed(faulty(tmp_path, (3, 1, 1), (3, 2, 0), (5, 0, 2)), [Gr(1, n) for n in range(2, 6)], every=True)
    assert (str(outcome.finding.where), outcome.minimum.certified) == ("Gr(1,3): (1) * (1) -> (2), q^(0)", True)
    assert outcome.minimum.below == 4 + 4
    assert outcome.note == "all failures: Gr(1,3): 2 cases in 2 rows; Gr(1,5): 1 case in 1 row"


def test_a_sample(tmp_path):
    """A sample agrees with its bound; it certifies nothing, and a failure in it is followed down to the minimum."""
    _, outcome = surveyed(write(tmp_path, POWERS), [Gr(1, 6)], draws=100, seed=5)
    assert (outcome.status, outcome.part) == ("agrees", "sample[seed 5]")
    assert f"is at most {failure_bound(100)}" in outcome.scope
    assert "rows drawn uniformly, with repetition, seed 5: 100 on Gr(1,6)" in outcome.scope
    path = faulty(tmp_path, (3, 1, 1), *((6, a, b) for a in range(6) for b in range(6)))
    _, outcome = surveyed(path, [Gr(1, 6)], draws=10)
    assert (outcome.status, str(outcome.finding.where)) == ("refuted", "Gr(1,3): (1) * (1) -> (2), q^(0)")
    assert outcome.minimum.certified
    fault = next(c for c in cases_of(Gr(1, 3)) if str(c[1]) == str(c[2]) == "(1)")
    assert outcome.minimum.below == smaller_than(fault, [Gr(1, 2), Gr(1, 3)])


def test_nothing_inside_the_premise(tmp_path):
    """If no row lies inside the premise that is no agreement."""
    source = POWERS.replace("on=ProjectiveSpaces()", "on=ProjectiveSpaces(), premise=lambda X, u, v: X.n > 5")
    for terms in ({}, {"draws": 7}):
        _, outcome = surveyed(write(tmp_path, source), [Gr(1, 3)], **terms)
        assert outcome.status == "undefined"
        assert "nothing compared" in outcome.scope


def test_not_finished(tmp_path):
    """A survey with a problem is no agreement; the problem is told."""
    done = run_campaign(load(write(tmp_path, POWERS)), [Gr(1, 2), Gr(1, 3)])
    last = replace(done.spaces[1], result=ChunkResult(seen=3, rows=3, cases=3, nonzero=3, before=3, problem="a lost network"))
    outcome = campaign_outcome(replace(done, spaces=(done.spaces[0], last)))
    assert (outcome.status, outcome.finding) == ("undefined", None)
    assert outcome.scope.startswith(
        "not finished: a lost network; compared so far: all of Gr(1,2) and the first 3 of 9 rows of Gr(1,3)"
    )


@pytest.mark.parametrize("seen", [0, 8])
def test_not_complete(tmp_path, seen):
    """Fewer rows than a space has are no agreement, whatever the reason is."""
    done = run_campaign(load(write(tmp_path, POWERS)), [Gr(1, 2), Gr(1, 3)])
    short = replace(done.spaces[1], result=ChunkResult(seen=seen, rows=seen, cases=seen, nonzero=seen, before=seen))
    assert campaign_outcome(done).status == "agrees"
    assert campaign_outcome(replace(done, spaces=(done.spaces[0], short))).status == "undefined"


STATUSES = {
    "crashed": "raise ValueError('here')",
    "too-slow": "while True: pass",
    "not-a-count": "return -1",
    "undefined": "from conjcheck import OutsideDomain\n        raise OutsideDomain('no')",
    "not-independent": "from conjcheck import product\n        product(u, v)",
    "unstable": "globals().setdefault('CALLS', []).append(1)\n        return 5 + len(CALLS)",
}


@pytest.mark.parametrize("status", STATUSES)
def test_other_statuses(tmp_path, status):
    """Whatever else a rule does is the outcome, at its place, and certifies nothing."""
    source = FAULTY.replace("{FAULTS}", "{(3, 1, 1)}").replace("return 7", STATUSES[status])
    _, outcome = surveyed(write(tmp_path, source), [Gr(1, 2), Gr(1, 3)], call_limit=0.3)
    assert outcome.status == status
    assert str(outcome.finding.row) == "Gr(1,3): (1) * (1)"
    assert not outcome.minimum.certified
    assert outcome.minimum.reach == "all 8 cases of the rows surveyed before it agree"
    assert campaign_record(*surveyed(tmp_path / "rule.py", [Gr(1, 2)])).status == "open"


@pytest.mark.parametrize("what", ["os._exit(0)", "os.kill(os.getpid(), 9)"])
def test_refuted_and_deadly(tmp_path, what):
    """A rule that is refuted, and elsewhere ends its process, does not end this one: the refutation is told, with why there is no layer."""
    source = "import os\n" + FAULTY.replace("{FAULTS}", "{(3, 1, 1)}").replace(
        "    power =", f"    if (X.n, u.length, v.length) == (3, 2, 2):\n        {what}\n    power =", 1
    )
    for every in (False, True):
        _, outcome = surveyed(write(tmp_path, source), [Gr(1, 2), Gr(1, 3)], every=every)
        assert (outcome.status, str(outcome.finding.where)) == ("refuted", "Gr(1,3): (1) * (1) -> (2), q^(0)")
        assert (outcome.finding.rule, outcome.finding.oracle) == (7, 1)
        assert "no layer was collected: when the rule was called around the failure, its process" in outcome.note
        assert outcome.confirmed_by
        assert not outcome.minimum.certified


def test_refuted_and_endless(tmp_path, monkeypatch):
    """A rule that hangs where it is called around the failure is ended."""
    monkeypatch.setattr(verdict, "_PATIENCE", 0.0)
    source = "import signal\n" + FAULTY.replace("{FAULTS}", "{(3, 1, 1)}").replace(
        "    power =",
        "    if (X.n, u.length, v.length) == (3, 2, 2):\n        signal.pthread_sigmask(signal.SIG_BLOCK, [14])\n        signal.pause()\n"
        "    power =",
        1,
    )
    done = run_campaign(load(write(tmp_path, source)), [Gr(1, 2), Gr(1, 3)], terms=Terms(call_limit=0.1))
    outcome = campaign_outcome(done, effort=replace(QUICK, layer=0.5, minimise=0.5, diagnosis=0.1))
    assert outcome.status == "refuted"
    assert "it took longer than" in outcome.note


def test_a_rule_that_prints(tmp_path, capfd):
    """What a rule prints while its failure is worked out does not reach the terminal."""
    source = FAULTY.replace("{FAULTS}", "{(3, 1, 1)}").replace("    power =", "    print('lantern')\n    power =", 1)
    path = write(tmp_path, "import os\nos.write(1, b'')\n" + source)
    _, outcome = surveyed(path, [Gr(1, 2), Gr(1, 3)])
    assert outcome.layer.complete
    assert capfd.readouterr().out == ""


def numbers(path):
    """What the record says, without seconds."""
    data = json.loads(record_path(load(path)).read_text())
    return {(c["space"]): {k: v for k, v in c.items() if k != "seconds"} for c in data["coverage"]}


def test_two_surveys_add_up(tmp_path):
    """Surveys of different spaces, and samples, add up in the record, which is read back."""
    path = write(tmp_path, POWERS)
    for spaces, terms in (
        ([Gr(1, 4)], {}),
        ([Gr(1, 2), Gr(1, 3)], {}),
        ([Gr(1, 9)], {"draws": 20}),
        ([Gr(1, 9)], {"draws": 30, "seed": 1}),
    ):
        written = write_campaign(*surveyed(path, spaces, **terms))
        assert written == (tmp_path / "records" / "powers.json", "")
    record = read_record(load(path))
    assert [(c.X, c.seen, c.rows, c.cases, c.nonzero, c.failing, c.complete) for c in record.coverage] == [
        (Gr(1, n), n * n, n * n, n * n, n * n, 0, True) for n in (2, 3, 4)
    ]
    assert [(s.X, s.seed, s.rows, s.failing) for s in record.samples] == [(Gr(1, 9), 0, 20, 0), (Gr(1, 9), 1, 30, 0)]
    assert (record.status, record.counterexamples) == ("open", ())
    before = numbers(path)
    write_campaign(*surveyed(path, [Gr(1, 3)]))
    assert numbers(path) == before


def test_what_is_on_record_is_said(tmp_path):
    """A survey of other spaces agrees, and says that the rule is refuted on record all the same; nothing is said of another version."""
    path = faulty(tmp_path, (4, 2, 1))
    write_campaign(*surveyed(path, [Gr(1, 2), Gr(1, 3), Gr(1, 4)]))
    _, outcome = surveyed(path, [Gr(1, 2)])
    assert (outcome.status, outcome.note) == ("agrees", "on record as refuted, at Gr(1,4): (2) * (1) -> (3), q^(0)")
    path.write_text(path.read_text() + "# another\n")
    assert surveyed(path, [Gr(1, 2)])[1].note == ""


def test_right_in_one_order_only(tmp_path):
    """A rule that is right when rows are asked in order, and wrong when it is asked first, is unstable, and nothing goes on record."""
    source = """
        seen = set()

        @candidate(on=ProjectiveSpaces())
        def first(X, u, v, w, d):
            seen.add((X.n, u.length + v.length))
            known = u.length + v.length < 1 or (X.n, u.length + v.length - 1) in seen
            return int(known and w.length == (u.length + v.length) % X.n and d == ((u.length + v.length) // X.n,))
        """
    done, outcome = surveyed(write(tmp_path, source), [Gr(1, 3), Gr(1, 6)])
    assert outcome.status == "unstable"
    assert outcome.finding.detail == (
        "expected one answer for one case, got 1 when all rows were asked in order, and 0 when some were asked in another order by a "
        "process that had been asked nothing before"
    )
    assert outcome.rows == 45
    with pytest.raises(RecordError, match="expected one answer of first for one case, got several; nothing was recorded"):
        write_campaign(done, outcome)
    assert not (tmp_path / "records").exists()


def test_two_surveys_that_end_at_once(tmp_path, monkeypatch):
    """However long it takes to work out what goes on record, nothing that another survey writes meanwhile is lost."""
    path = write(tmp_path, POWERS)
    real, inside, most = verdict.recording, [], []

    def slowly(*given, **named):
        inside.append(1)
        most.append(len(inside))
        made = real(*given, **named)
        time.sleep(0.3)
        inside.pop()
        return made

    monkeypatch.setattr(verdict, "recording", slowly)
    surveys = [surveyed(path, [Gr(1, n)]) for n in (2, 3, 4)]
    threads = [Thread(target=write_campaign, args=survey) for survey in surveys]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert most == [1, 1, 1]
    assert [entry.X for entry in read_record(load(path)).coverage] == [Gr(1, 2), Gr(1, 3), Gr(1, 4)]


def test_a_refutation_on_record(tmp_path):
    """A refutation is recorded with its values, whether it is minimal, and how far the rows before it agree."""
    path = faulty(tmp_path, (4, 2, 1))
    write_campaign(*surveyed(path, [Gr(1, n) for n in (2, 3, 4)]))
    record = read_record(load(path))
    (found,) = record.counterexamples
    assert (record.status, str(found.where), found.rule, found.oracle, found.minimal) == (
        "refuted",
        "Gr(1,4): (2) * (1) -> (3), q^(0)",
        7,
        1,
        True,
    )
    last = record.coverage[-1]
    assert (last.X, last.complete, last.failing) == (Gr(1, 4), False, 0)
    assert last.seen == len({c[1:3] for c in cases_of(Gr(1, 4)) if key_of(c)[:9] < (3, 1, 3, "A", (1,), 3, 2, 2, 1)})
    write_campaign(*surveyed(path, [Gr(1, n) for n in (2, 3, 4)], every=True))
    last = read_record(load(path)).coverage[-1]
    assert (last.X, last.complete, last.failing) == (Gr(1, 4), True, 1)


def test_a_changed_rule(tmp_path):
    """One character of the rule changed: what was on record is told as stale, and dropped by the next survey."""
    path = write(tmp_path, POWERS)
    kept = tmp_path / "kept.sqlite"
    done = run_campaign(load(path), [Gr(1, 2), Gr(1, 3)], ledger=kept)
    write_campaign(done, campaign_outcome(done))
    path.write_text(path.read_text().replace("d == (1,)", "d == (1, )"))
    again = run_campaign(load(path), [Gr(1, 2)], ledger=kept)
    outcome = campaign_outcome(again)
    assert outcome.status == "agrees"
    assert outcome.note == (
        "4 rows of Gr(1,2) were compared for another version of the rule and count no more; "
        "9 rows of Gr(1,3) were compared for another version of the rule and count no more"
    )
    write_campaign(again, outcome)
    assert [c.X for c in read_record(load(path)).coverage] == [Gr(1, 2)]
    assert read_record(load(path)).rule == again.rule == current_record(load(path)).rule


def test_a_repaired_rule(tmp_path):
    """After a repair the old counterexample is computed again: renewed if it refutes still, else retired with its certificate."""
    path = faulty(tmp_path, (3, 1, 1), (4, 2, 1))
    for n in (3, 4):
        write_campaign(*surveyed(path, [Gr(1, n)], every=True))
    first = read_record(load(path))
    assert [(str(c.where.X), c.rule_hash) for c in first.counterexamples] == [("Gr(1,3)", first.rule), ("Gr(1,4)", first.rule)]
    faulty(tmp_path, (4, 2, 1))
    os.utime(path, (1e9, 1e9))
    words = "1 counterexample on record refutes no more and was retired: Gr(1,3): (1) * (1) -> (2), q^(0)"
    done, outcome = surveyed(path, [Gr(1, 2)])
    assert write_campaign(done, outcome)[1] == words
    half = read_record(load(path))
    assert (half.status, half.rule != first.rule) == ("refuted", True)
    (left,) = half.counterexamples
    assert (left.where, left.rule_hash, left.minimal, left.rule) == (first.counterexamples[1].where, half.rule, False, 7)
    proof = json.loads((tmp_path / "records" / left.certificate).read_text())
    assert proof["rule"]["hash"] == half.rule
    assert not (tmp_path / "records" / first.counterexamples[0].certificate).exists()
    write(tmp_path, POWERS)
    os.utime(path, (2e9, 2e9))
    write_campaign(*surveyed(path, [Gr(1, 2)]))
    last = read_record(load(path))
    assert (last.status, last.counterexamples) == ("open", ())
    assert [name.name for name in (tmp_path / "records").iterdir()] == ["powers.json"]


@pytest.mark.parametrize("what", ["import os\n        os._exit(0)", "raise ValueError('no')"])
def test_a_repair_that_cannot_be_judged(tmp_path, what):
    """Where the rule gives no value any more, even ends its process, the old counterexample stays that of the old version."""
    path = faulty(tmp_path, (3, 1, 1))
    write_campaign(*surveyed(path, [Gr(1, 3)]))
    first = read_record(load(path))
    write(tmp_path, FAULTY.replace("{FAULTS}", "{(3, 1, 1)}").replace("return 7", what))
    os.utime(path, (1e9, 1e9))
    _, note = write_campaign(*surveyed(path, [Gr(1, 2)]))
    assert "the counterexample to an earlier version at Gr(1,3): (1) * (1) -> (2), q^(0) could not be computed again" in note
    record = read_record(load(path))
    assert (record.status, [c.rule_hash for c in record.counterexamples]) == ("open", [first.rule])
    assert record.refuting() == []


def test_changed_after_the_survey(tmp_path):
    """A rule changed between the survey and its recording is not credited with the work of the old one."""
    path = write(tmp_path, POWERS)
    done, outcome = surveyed(path, [Gr(1, 2)])
    path.write_text(path.read_text().replace("(1,)", "(2,)"))
    os.utime(path, (1e9, 1e9))
    with pytest.raises(RecordError, match=r"as it was when the survey began .* nothing was recorded"):
        write_campaign(done, outcome)
    assert not (tmp_path / "records").exists()


def test_the_ring_of_flags(tmp_path):
    """The same on complete flags: the smallest of two failures, in the first space that has one."""
    source = """
    from planted import truth
    from conjcheck import Fl
    KNOWN = {X: truth(X) for X in (Fl(2), Fl(3))}

    @candidate(on=CompleteFlags())
    def flags(X, u, v, w, d):
        return KNOWN[X][u, v].get((w, d), 0) + (u.length == v.length == 2 and d == (1, 0))
    """
    _, outcome = surveyed(write(tmp_path, source, head=HEAD), [Fl(3), Fl(2)])
    fault = min((c for c in cases_of(Fl(3)) if c[1].length == c[2].length == 2 and c[4] == (1, 0)), key=key_of)
    assert outcome.finding.where.sort_key == (*outcome.finding.row.sort_key, 1, (1, 0), fault[3].index)
    assert outcome.minimum.certified
    assert outcome.minimum.below == smaller_than(fault, [Fl(2), Fl(3)])


def test_it_is_a_campaign(tmp_path):
    """From Python: one call, names of spaces or spaces."""
    outcome = verdict.survey(
        load(write(tmp_path, POWERS)), ["Gr(1,2)", Gr(1, 3)], ledger=str(tmp_path / "kept.sqlite"), record=True
    )
    assert outcome.status == "agrees"
    assert [c.X for c in read_record(load(tmp_path / "rule.py")).coverage] == [Gr(1, 2), Gr(1, 3)]
    assert Campaign is room.Campaign
