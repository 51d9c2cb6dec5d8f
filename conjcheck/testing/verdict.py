"""The verdict on a survey at scale: its outcome for all reports, and what of it goes on record."""

from collections.abc import Iterable
from concurrent.futures import Executor
from contextlib import suppress
from dataclasses import replace
from pathlib import Path
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import RecordError
from conjcheck.evidence.entries import Covered, Sample, own_version
from conjcheck.evidence.reading import parse_place
from conjcheck.evidence.record import Record, current_record, read_record, records_held
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.apart import Lost, apart
from conjcheck.testing.campaign import Campaign, SpaceResult, Terms, run_campaign
from conjcheck.testing.compare import Comparer
from conjcheck.testing.covered import covered
from conjcheck.testing.examine import EFFORTS, Effort, Examination
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import Minimum, certified, confirm, minimise
from conjcheck.testing.outcome import Outcome
from conjcheck.testing.recording import Recording, asked_again, counterexample, recording, write_recording
from conjcheck.testing.scope import survey_scope, survey_spaces
from conjcheck.testing.survey import Coverage, SpaceCoverage, in_reach
from conjcheck.testing.worker import limit_memory
from conjcheck.wording import counted

__all__ = ["campaign_outcome", "campaign_record", "survey", "write_campaign"]

_HOW = "rows drawn uniformly, with repetition"
_PATIENCE = 60.0
"""Seconds for what has no budget of its own: setting up the oracle, and confirming its value."""


def survey(
    conjecture: Conjecture,
    spaces: Iterable[FlagVariety | str],
    *,
    jobs: int = 1,
    executor: Executor | None = None,
    ledger: str | Path | None = None,
    record: bool = False,
    **terms: Any,
) -> Outcome:
    """Compare a conjecture with the oracle on whole spaces, from Python: what ``conjcheck survey`` does.

    Args:
        conjecture: a decorated function in a file.
        spaces: flag varieties of its family, or their names.
        jobs: processes on this machine.
        executor: where chunks are compared instead: any ``concurrent.futures.Executor``.
        ledger: the file that keeps finished chunks; ``None`` to keep nothing.
        record: whether to add what was compared to the record beside the plug-in.
        terms: the fields of ``conjcheck.testing.campaign.Terms``: ``every``, ``draws``, ``seed``, ``call_limit``, ``memory``,
            ``cross_check``.

    Raises:
        the errors of ``run_campaign``; RecordError: the record cannot be used.
    """
    chosen = [FlagVariety(X) if isinstance(X, str) else X for X in spaces]
    kept = None if ledger is None else Path(ledger)
    done = run_campaign(conjecture, chosen, terms=Terms(**terms), jobs=jobs, executor=executor, ledger=kept)
    outcome = campaign_outcome(done)
    if record:
        _, note = write_campaign(done, outcome)
        outcome = outcome.noted(note)
    return outcome


def campaign_outcome(campaign: Campaign, *, effort: Effort = EFFORTS["normal"]) -> Outcome:
    """The outcome of a survey at scale: what agrees, or the smallest failure, worked out as in any other examination.

    What is worked out around a refutation (the minimum, the layer) calls the rule in a copy of this process; if the rule ends that, the
    outcome says so and holds what the survey found. A rule that ended its process before, hung or ate memory is not called again.
    """
    outcome = _outcome(campaign, effort).doubted()
    if campaign.again and campaign.again["status"] == "crashed":
        outcome = outcome.noted(
            f"asked in another order, by a process that had been asked nothing before, it crashed at {campaign.again['where']}: "
            f"{campaign.again['detail']}"
        )
    if campaign.unseen:
        more = f" and {len(campaign.unseen) - 3} more" if len(campaign.unseen) > 3 else ""
        outcome = outcome.noted(
            f"the rule reads {', '.join(campaign.unseen[:3])}{more}, which its hash does not see: a change there would go unnoticed; name "
            "the file in a string of the plug-in"
        )
    if outcome.status == "agrees":
        with suppress(RecordError):  # told when it is to be written
            known = read_record(campaign.conjecture).refuting(campaign.rule)
            outcome = outcome.noted(f"on record as refuted, at {known[0].where}" if known else "")
    return outcome


def _outcome(campaign: Campaign, effort: Effort) -> Outcome:
    coverage = _coverage(campaign)
    part = "survey" if campaign.terms.draws is None else f"sample[seed {campaign.terms.seed}]"
    failing = next((space for space in campaign.spaces if space.result.findings), None)
    if failing is None and campaign.again is not None and campaign.again["status"] != "crashed":
        finding = Finding(
            "unstable", parse_place(campaign.again["where"]), detail=_answers(campaign.again), trace=campaign.again["trace"]
        )
        return replace(_agreement(campaign, part, coverage), status="unstable", finding=finding)
    if failing is None:
        return _agreement(campaign, part, coverage)
    if campaign.terms.draws is not None:
        coverage = Coverage(named=True)
    entry = failing.result.findings[0]
    place = parse_place(entry["where"])
    before = sum(s.result.cases for s in campaign.spaces if s.X < failing.X) + failing.result.before
    note = _totals(campaign)
    if entry["status"] == "refuted":
        try:
            outcome = apart(
                lambda: _worked_out(campaign, coverage, part, entry, before, effort),
                seconds=effort.minimise + effort.layer + effort.diagnosis + 10 * campaign.terms.call_limit + _PATIENCE,
                shared=(campaign.conjecture,),
            )
            return replace(outcome, seconds=campaign.seconds, note=note)
        except Lost as lost:
            note = "; ".join(
                [*filter(None, [note]), f"no layer was collected: when the rule was called around the failure, {lost}"]
            )
    reach = "rows were drawn, not compared in order"
    if campaign.terms.draws is None:
        reach = f"all {before:,} cases of the rows surveyed before it agree"
    value, true = (entry[name] if isinstance(entry[name], int) else None for name in ("rule", "oracle"))
    finding, how = Finding(entry["status"], place, value, true, detail=entry["detail"], trace=entry["trace"]), ""
    if finding.status == "refuted":
        finding, how = confirm(finding)
    return Outcome(
        campaign.conjecture,
        part,
        finding.status,
        survey_scope(coverage, campaign.conjecture),
        survey_spaces(coverage),
        *(coverage.rows, coverage.cases, coverage.nonzero),
        finding=finding,
        minimum=Minimum(finding, False, before, reach),
        confirmed_by=how,
        note=note,
        seconds=campaign.seconds,
    )


def _answers(entry: dict[str, Any]) -> str:
    """The two answers of a rule that is no function of its arguments."""
    now = entry["detail"] if entry["status"] != "refuted" else "False" if entry["rule"] is None else entry["rule"]
    right = "True" if entry["rule"] is None and entry["status"] == "refuted" else entry["oracle"]
    first = "no complaint" if entry["status"] != "refuted" else right
    return (
        f"expected one answer for one case, got {first} when all rows were asked in order, and {now} when some were asked in another order "
        "by a process that had been asked nothing before"
    )


def _worked_out(campaign: Campaign, coverage: Coverage, part: str, entry: dict[str, Any], before: int, effort: Effort) -> Outcome:
    """The outcome for a row that was refuted, compared once more, in this process, which is a copy."""
    limit_memory(campaign.terms.memory)
    examination = Examination(campaign.conjecture, effort, call_limit=campaign.terms.call_limit, coverage=coverage)
    place = parse_place(entry["where"])
    row = place.row if isinstance(place, Case) else place
    with examination.comparer.limit:
        result = examination.comparer.row(row)
    if result.finding is None:
        finding = Finding("unstable", place, detail=f"the rule gave {entry['rule']} in the survey, and agrees when asked again")
        return replace(_agreement(campaign, part, coverage), status="unstable", finding=finding)
    minimum = _minimum(campaign, examination, result.finding, before + result.cases)
    return examination.work_out(result.finding, part, 0.0, minimum=minimum)


def _minimum(campaign: Campaign, examination: Examination, finding: Finding, below: int) -> Minimum | None:
    """The smallest failure: certified if all smaller spaces of the family were compared; else looked for among those, within a budget."""
    if campaign.terms.draws is not None:
        return None
    coverage = examination.coverage
    complete = {space.X for space in coverage.complete}
    missing = []
    skipped: list[Any] = []
    for X in in_reach(campaign.conjecture, skipped):
        if not X < finding.row.X:
            break
        if X not in complete:
            missing.append(X)
    else:  # it ended before the finding: there may be more
        return Minimum(
            finding, False, below, f"all {below:,} smaller cases surveyed agree; the family has too many spaces to name others"
        )
    coverage.skipped = skipped
    if not missing:
        return certified(finding, coverage, below)
    if campaign.terms.every:
        names = ", ".join(X.name for X in missing[:5]) + (" ..." if len(missing) > 5 else "")
        return Minimum(finding, False, below, f"all {below:,} smaller cases surveyed agree; not surveyed: {names}")
    found = minimise(examination.comparer, finding, coverage, budget=examination.effort.minimise)
    coverage.spaces.sort(key=lambda space: space.X.sort_key)
    return found


def _coverage(campaign: Campaign) -> Coverage:
    """How far a survey in order got."""
    spaces = [
        SpaceCoverage(
            s.X, s.result.seen, s.result.rows, s.result.cases, s.result.nonzero, complete=s.complete, seconds=s.result.seconds
        )
        for s in campaign.spaces
    ]
    return Coverage(spaces, named=True)


def _agreement(campaign: Campaign, part: str, coverage: Coverage) -> Outcome:
    """The outcome when nothing failed; it says ``undefined`` if nothing was compared."""
    rows, cases = coverage.rows, coverage.cases
    if campaign.terms.draws is None:
        scope, where = survey_scope(coverage, campaign.conjecture), survey_spaces(coverage)
    else:
        parts = [f"{s.result.rows:,} on {s.X} ({_sample(campaign, s).bound})" for s in campaign.spaces if s.result.rows]
        where = ", ".join(str(s.X) for s in campaign.spaces)
        scope = (
            f"samples of {_HOW}, seed {campaign.terms.seed}: {', '.join(parts)}; {counted(rows, 'row')}, {counted(cases, 'case')}"
        )
    status = "agrees" if rows and all(space.complete for space in campaign.spaces) else "undefined"
    if not rows:
        remedy = "name larger spaces" if campaign.terms.draws is None else "raise --sample, or name larger spaces"
        scope = f"nothing compared: expected a row inside the premise on {where or 'the spaces named'}, got none; {remedy}"
    if campaign.problems:
        scope = f"not finished: {'; '.join(campaign.problems)}; compared so far: {scope}"
    return Outcome(
        campaign.conjecture,
        part,
        status,
        scope,
        where,
        rows,
        cases,
        coverage.nonzero,
        seconds=campaign.seconds,
        note=_totals(campaign),
        spaces=_spaces(campaign),
    )


def _spaces(campaign: Campaign) -> tuple[dict[str, Any], ...]:
    """How far each space was compared, in JSON types; of a sample, that rows were drawn."""
    if campaign.terms.draws is None:
        return tuple(space.as_json() for space in _coverage(campaign).spaces)
    return tuple({"space": s.X.name, "drawn": True} for s in campaign.spaces)


def _totals(campaign: Campaign) -> str:
    """What else there is to say: all failures, if they were collected; older work that counts no more."""
    words = list(campaign.stale)
    if campaign.terms.every and any(s.result.failing for s in campaign.spaces):
        found = [
            f"{s.X}: {counted(s.result.failing, 'case')} in {counted(s.result.failing_rows, 'row')}"
            for s in campaign.spaces
            if s.result.failing
        ]
        words.append(f"all failures: {'; '.join(found)}")
        words += [f"not finished: {problem}" for problem in campaign.problems]
    return "; ".join(words)


def _sample(campaign: Campaign, space: SpaceResult) -> Sample:
    return Sample(
        space.X,
        _HOW,
        campaign.terms.seed,
        rows=space.result.rows,
        cases=space.result.cases,
        failing=space.result.failing_rows,
        conjcheck=own_version(),
    )


def campaign_record(campaign: Campaign, outcome: Outcome) -> Record:
    """The record of the conjecture with this survey added; see :func:`conjcheck.testing.recording.recording`.

    Raises:
        RecordError: the record beside the plug-in cannot be used, or contradicts the survey; or the rule was changed meanwhile.
    """
    return _recording(campaign, outcome).record


def _recording(campaign: Campaign, outcome: Outcome) -> Recording:
    """The same, with what became of older counterexamples: these are computed again in a copy of this process."""
    conjecture, limit = campaign.conjecture, campaign.terms.call_limit
    if outcome.status == "unstable":
        raise RecordError(f"expected one answer of {conjecture.name} for one case, got several; nothing was recorded")
    if current_record(conjecture).rule != campaign.rule:
        raise RecordError(
            f"expected {conjecture.file} as it was when the survey began ({campaign.rule[:19]}), it was changed meanwhile; "
            "nothing was recorded, survey the rule as it stands"
        )
    coverage: list[Covered] = []
    samples: list[Sample] = []
    if campaign.terms.draws is None:
        failing = {s.X: s.result.failing for s in campaign.spaces if campaign.terms.every}
        entries = covered(_coverage(campaign), conjecture, cross_check=campaign.terms.cross_check)
        coverage = [replace(entry, failing=failing.get(entry.X, 0)) for entry in entries]
    else:
        samples = [_sample(campaign, space) for space in campaign.spaces if space.result.rows and space.complete]
    found = None
    if outcome.finding is not None and outcome.status == "refuted":
        minimal = outcome.minimum is not None and outcome.minimum.certified
        found = counterexample(outcome.finding, conjecture, minimal=minimal, confirmed_by=outcome.confirmed_by)

    def again(where: Case | Row) -> Finding | None:
        def work() -> Finding | None:
            limit_memory(campaign.terms.memory)
            return asked_again(Comparer(conjecture, call_limit=limit), where)

        return apart(work, seconds=10 * limit + _PATIENCE, shared=(conjecture,))

    return recording(conjecture, again, coverage=coverage, samples=samples, found=found)


def write_campaign(campaign: Campaign, outcome: Outcome) -> tuple[Path, str]:
    """Add a survey to the record beside the plug-in; say where that is, and what became of counterexamples to earlier versions.

    Raises:
        RecordError: the record cannot be used or written, contradicts the survey, or the rule was changed meanwhile.
    """
    with records_held(campaign.conjecture):
        made = _recording(campaign, outcome)
        return write_recording(campaign.conjecture, made), made.note
