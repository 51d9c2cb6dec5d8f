"""Chunks: every row once, in order, whatever else; samples that depend on seed and place alone."""

import itertools
import json
from collections import Counter
from dataclasses import asdict, fields, replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from planted import SMALL, cases_of, key_of, rule_by_cases, rule_by_rows, truth

from conjcheck import Fl, FlagVariety, Gr, candidate
from conjcheck.geometry.case import count_cases, rows
from conjcheck.geometry.families import PartialFlags
from conjcheck.testing import chunks as room
from conjcheck.testing.chunks import Chunk, ChunkResult, chunks, compare_chunk, rows_of_chunk, sample_chunks
from conjcheck.testing.compare import Comparer


def some_rules():
    """Conjectures that are never called: by cases, by cases without q, by more cases, by rows."""

    @candidate(on=PartialFlags())
    def by_case(X, u, v, w, d):
        raise AssertionError

    @candidate(on=PartialFlags(), ring="classical")
    def by_classical_case(X, u, v, w):
        raise AssertionError

    @candidate(on=PartialFlags(), ring="equivariant quantum")
    def by_equivariant_case(X, u, v, w, d):
        raise AssertionError

    @candidate(on=PartialFlags())
    def by_row(X, u, v):
        raise AssertionError

    return by_case, by_classical_case, by_equivariant_case, by_row


CONJECTURES = some_rules()
SPACES = ["Gr(1,2)", "Gr(2,5)", "Fl(4)", "Fl(1,3;5)", "Gr(1,40)", "B3/B", "G2/B", "C3/P2", "Fl(5)", "D4/P2", "Fl(2,3;6)"]


@pytest.mark.parametrize("name", SPACES)
@pytest.mark.parametrize("conjecture", CONJECTURES, ids=lambda c: c.name)
def test_every_row_once(conjecture, name):
    """The pieces follow one another without gap or overlap from the first row to the last; none is empty or too long."""
    X = FlagVariety(name)
    found = list(chunks(conjecture, X))
    assert found[0][0] == 0
    assert all(left[1] == right[0] for left, right in itertools.pairwise(found))
    assert found[-1][1] == X.number_of_classes**2
    assert all(0 < last - first <= 512 for first, last in found)
    assert found == list(chunks(conjecture, X))


@pytest.mark.parametrize("conjecture", CONJECTURES, ids=lambda c: c.name)
def test_the_work_in_a_piece(conjecture):
    """Asked case by case a piece of more than one row has at most 100,000 cases; a piece ends only where the next row has no room."""
    X = Fl(5)
    rings = {"classical": conjecture.is_classical, "equivariant": conjecture.is_equivariant}
    for first, last in chunks(conjecture, X):
        sizes = [count_cases(X, row.u.length + row.v.length, **rings) for row in rows(X, first, last + 1)]
        inside = sum(sizes[: last - first])
        if conjecture.by_rows:
            assert last - first == 512 or last == X.number_of_classes**2
            continue
        assert last - first == 1 or inside <= 100_000
        assert last - first == 512 or last == X.number_of_classes**2 or inside + sizes[-1] > 100_000


@settings(max_examples=40, deadline=None)
@given(X=st.sampled_from(SMALL), most=st.integers(1, 40), cases=st.integers(1, 400), conjecture=st.sampled_from(CONJECTURES))
def test_whatever_the_limits(X, most, cases, conjecture):
    """However small the limits are, all rows are there once, in order."""
    before = room._MOST_ROWS, room._MOST_CASES
    room._MOST_ROWS, room._MOST_CASES = most, cases
    try:
        pieces = list(chunks(conjecture, X))
    finally:
        room._MOST_ROWS, room._MOST_CASES = before
    chunk = Chunk("f", "n", "r", "quantum", X.name, None, 0, 0)
    assert [row for piece in pieces for row in rows_of_chunk(chunk.part(*piece))] == list(rows(X))


def test_only_the_kind_of_the_rule_counts():
    """Two conjectures of one kind are cut alike, whatever their premise, family or name."""
    rules = rule_by_cases(), rule_by_cases(premise=lambda X, u, v: u.length == 1)
    assert list(chunks(rules[0], Fl(4))) == list(chunks(rules[1], Fl(4))) == list(chunks(CONJECTURES[0], Fl(4)))
    assert list(chunks(rule_by_rows(), Fl(4))) == list(chunks(CONJECTURES[-1], Fl(4)))


@pytest.mark.parametrize("draws", [1, 63, 64, 65, 200])
def test_pieces_of_a_sample(draws):
    """The pieces of a sample hold each draw once, in order."""
    assert [k for first, last in sample_chunks(draws) for k in range(first, last)] == list(range(draws))


SAMPLE = Chunk("f", "n", "r", "quantum", "Fl(4)", 7, 0, 500)


def test_samples_are_reproducible():
    """A draw depends on seed, space and its place alone: not on how the sample is cut, nor on its size."""
    whole = list(rows_of_chunk(SAMPLE))
    assert len(whole) == 500
    assert [row for first, last in sample_chunks(500) for row in rows_of_chunk(SAMPLE.part(first, last))] == whole
    assert [row for k in range(500) for row in rows_of_chunk(SAMPLE.part(k, k + 1))] == whole
    assert list(rows_of_chunk(SAMPLE.part(0, 100))) == whole[:100]
    assert list(rows_of_chunk(replace(SAMPLE, every=True, rule="s", name="m", call_limit=1.0))) == whole
    assert list(rows_of_chunk(replace(SAMPLE, seed=8))) != whole
    first = [str(row) for row in rows_of_chunk(SAMPLE.part(0, 3))]
    assert first == [str(row) for row in rows_of_chunk(SAMPLE.part(0, 3))]
    assert all(row.X is Fl(4) for row in whole)


def test_samples_are_uniform():
    """20,000 draws from the 36 rows of Gr(2,4): the statistic chi-square with 35 degrees of freedom is below 66.6 (0.1 %)."""
    counts = Counter(rows_of_chunk(replace(SAMPLE, space="Gr(2,4)", last=20_000)))
    assert set(counts) == set(rows(Gr(2, 4)))
    assert sum(36 * (count - 20_000 / 36) ** 2 for count in counts.values()) / 20_000 < 66.6
    again = Counter(rows_of_chunk(replace(SAMPLE, space="Gr(2,4)", seed=8, last=20_000)))
    assert again != counts


def test_a_chunk_as_text():
    """A chunk is one line of text, and comes back."""
    for chunk in (SAMPLE, replace(SAMPLE, seed=None, every=True, cross_check=True, file="a b\n'\"ü.py")):
        assert "\n" not in chunk.as_text()
        assert Chunk.parse(chunk.as_text()) == chunk
    with pytest.raises((TypeError, ValueError)):
        Chunk.parse('{"file": "f"}')


FOUND = {"where": "Gr(2,4): () * ()", "status": "crashed", "rule": None, "oracle": None, "detail": "x", "trace": ""}
GOOD = ChunkResult(5, 4, 60, 9, 1, 2, 30, 0.5, (FOUND, FOUND))


def test_a_result_as_json():
    """A result goes to JSON text and comes back."""
    for result in (
        ChunkResult(),
        GOOD,
        ChunkResult(problem="x"),
        ChunkResult(failing_rows=1, failing=1, findings=(FOUND,), ended=True),
    ):
        assert ChunkResult.parse(json.loads(json.dumps(result.as_json()))) == result


BAD = {
    "seen": [-1, 1.0, True, "5", None, 10**30, 3],
    "rows": [-1, 6, 61],
    "cases": [-1, 8, 29, float("nan")],
    "nonzero": [61, 2.5],
    "failing_rows": [0, 3],
    "failing": [0, 1],
    "before": [61],
    "seconds": [float("nan"), float("inf"), -1.0, "0", True, None],
    "findings": [[], {}, "x", [7], [{}], [{**FOUND, "status": "agrees"}], [{**FOUND, "where": 7}], [FOUND, FOUND, FOUND]],
    "ended": [0, None, "no"],
    "problem": [None, 7],
}


@pytest.mark.parametrize(("name", "value"), [(name, value) for name, values in BAD.items() for value in values])
def test_what_is_no_result(name, value):
    """A result with a field of the wrong type, out of bounds, or that contradicts the others is none."""
    assert set(BAD) == {field.name for field in fields(ChunkResult)}
    good = GOOD.as_json()
    ChunkResult.parse(good)
    with pytest.raises(ValueError, match="expected the result of a chunk"):
        ChunkResult.parse({**good, name: value})


def test_fields_missing_or_too_many():
    """All fields and no others."""
    good = GOOD.as_json()
    for name in good:
        with pytest.raises(ValueError, match="expected the result of a chunk"):
            ChunkResult.parse({key: value for key, value in good.items() if key != name})
    with pytest.raises(ValueError, match="expected the result of a chunk"):
        ChunkResult.parse({**good, "more": 1})


def test_what_it_covers():
    """A result is that of some rows if it has seen all of them, or fewer and ended at a failure."""
    ended = ChunkResult(seen=3, failing_rows=1, failing=1, findings=(FOUND,), ended=True)
    assert [k for k in range(8) if ChunkResult(seen=5).covers(0, k)] == [5]
    assert [k for k in range(8) if ended.covers(0, k)] == [4, 5, 6, 7]
    assert not ChunkResult(seen=5, problem="x").covers(0, 5)


def chunk_of(X, **choices):
    """All rows of a space as one chunk."""
    return replace(Chunk("f", "n", "r", "quantum", X.name, None, 0, X.number_of_classes**2), **choices)


@pytest.mark.parametrize("kind", [rule_by_cases, rule_by_rows])
def test_a_right_rule(kind):
    """All rows, cases and nonzero constants are counted."""
    X = Fl(3)
    found = compare_chunk(Comparer(kind()), chunk_of(X))
    assert (found.seen, found.rows) == (36, 36)
    assert found.cases == found.before == len(cases_of(X))
    assert found.nonzero == sum(map(len, truth(X).values())) == 45
    assert not found.findings
    assert found.covers(0, 36)


@settings(max_examples=30, deadline=None)
@given(
    faults=st.lists(st.sampled_from(cases_of(Fl(3))), min_size=1, max_size=6, unique=True),
    cuts=st.sets(st.integers(1, 35), max_size=4),
    kind=st.sampled_from([rule_by_cases, rule_by_rows]),
    every=st.booleans(),
)
def test_adding_up(faults, cuts, kind, every):
    """However it is cut, the sum of the parts is the whole: all failures in order, or everything before the first."""
    X = Fl(3)
    faults = sorted(faults, key=key_of)
    comparer = Comparer(kind(faults))
    marks = []
    whole = compare_chunk(comparer, chunk_of(X, every=every), marks.append)
    total, places = ChunkResult(), [0, *sorted(cuts), 36]
    for first, last in itertools.pairwise(places):
        if not total.ended:
            total += compare_chunk(comparer, chunk_of(X, every=every).part(first, last))
    assert replace(total, seconds=0.0) == replace(whole, seconds=0.0)
    rows_of = {(c[1], c[2]) for c in faults}
    if every:
        assert len(whole.findings) == whole.failing == len(faults)
        assert whole.failing_rows == len(rows_of)
        assert whole.cases == len(cases_of(X))
        assert marks == list(range(36))
    else:
        assert (whole.failing, whole.failing_rows, whole.ended) == (1, 1, True)
        assert marks == list(range(whole.seen + 1))
    assert [e["where"] for e in whole.findings] == [
        f"{X}: {u} * {v} -> {w}, q^({','.join(map(str, d))})" for X, u, v, w, d in faults
    ][: None if every else 1]
    first_row = faults[0][1:3]
    below = [c for c in cases_of(X) if key_of(c) < key_of(faults[0]) and c[1:3] != first_row]
    assert whole.before == len(below)


def test_most_kept(monkeypatch):
    """Beyond a number failures are only counted, the smallest are kept."""
    monkeypatch.setattr(room, "_MOST_KEPT", 5)
    found = compare_chunk(Comparer(rule_by_cases(cases_of(Fl(3)))), chunk_of(Fl(3), every=True))
    assert found.failing == len(cases_of(Fl(3)))
    assert len(found.findings) == 5
    assert found.findings[0]["where"] == "Fl(3): [123] * [123] -> [123], q^(0,0)"
    assert ChunkResult.parse(found.as_json()) == replace(found, seconds=round(found.seconds, 4))


def test_after_a_crash_in_a_row_nothing_more_of_it_counts():
    """With every failure wanted, a row that is not compared to the end adds no cases."""
    crash = cases_of(Fl(3))[40]
    wrong = next(c for c in cases_of(Fl(3)) if c[:3] == crash[:3] and key_of(c) < key_of(crash))
    good = rule_by_cases([wrong]).rule

    @candidate(on=PartialFlags())
    def rule(X, u, v, w, d):
        if (X, u, v, w, d) == crash:
            raise ValueError("here")
        return good(X, u, v, w, d)

    found = compare_chunk(Comparer(rule), chunk_of(Fl(3), every=True))
    assert [entry["status"] for entry in found.findings] == ["refuted", "crashed"]
    assert found.cases == len([c for c in cases_of(Fl(3)) if c[:3] != crash[:3]])
    assert (found.seen, found.failing_rows, found.failing) == (36, 1, 2)


def test_asdict_is_plain():
    """A chunk holds plain data only."""
    assert json.loads(json.dumps(asdict(SAMPLE))) == asdict(SAMPLE)
