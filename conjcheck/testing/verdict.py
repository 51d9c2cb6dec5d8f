"""The verdict on a survey at scale: its outcome for all reports, and what of it goes on record."""

from dataclasses import replace
from pathlib import Path
from typing import Any

from conjcheck.evidence.entries import Counterexample, Covered, Sample, own_version
from conjcheck.evidence.reading import parse_place
from conjcheck.evidence.record import Record, current_record, write_record
from conjcheck.geometry.case import Case
from conjcheck.testing.campaign import Campaign, SpaceResult
from conjcheck.testing.covered import covered
from conjcheck.testing.examine import EFFORTS, Effort, Examination
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import Minimum, certified, minimise
from conjcheck.testing.outcome import Outcome
from conjcheck.testing.scope import survey_scope, survey_spaces
from conjcheck.testing.survey import Coverage, SpaceCoverage, in_reach

__all__ = ["campaign_outcome", "campaign_record", "write_campaign"]

_HOW = "rows drawn uniformly, with repetition"


def campaign_outcome(campaign: Campaign, *, effort: Effort = EFFORTS["normal"]) -> Outcome:
    """The outcome of a survey at scale: what agrees, or the smallest failure, worked out as in any other examination.

    A refuting row is compared once more in this process, and the layer is collected; a rule that ended its process, hung or ate memory
    is not called here again.
    """
    coverage = _coverage(campaign)
    part = "survey" if campaign.terms.draws is None else f"sample[seed {campaign.terms.seed}]"
    failing = next((space for space in campaign.spaces if space.result.findings), None)
    if failing is None:
        return _agreement(campaign, part, coverage)
    if campaign.terms.draws is not None:
        coverage = Coverage(named=True)
    entry = failing.result.findings[0]
    examination = Examination(campaign.conjecture, effort, call_limit=campaign.terms.call_limit, coverage=coverage)
    before = sum(s.result.cases for s in campaign.spaces if s.X < failing.X) + failing.result.before
    note = _totals(campaign)
    if entry["status"] != "refuted":
        finding = Finding(entry["status"], parse_place(entry["where"]), detail=entry["detail"], trace=entry["trace"])
        reach = (
            f"all {before:,} cases before it agree" if campaign.terms.draws is None else "rows were drawn, not compared in order"
        )
        return Outcome(
            campaign.conjecture,
            part,
            finding.status,
            survey_scope(coverage, campaign.conjecture),
            survey_spaces(coverage),
            *(coverage.rows, coverage.cases, coverage.nonzero),
            finding=finding,
            minimum=Minimum(finding, False, before, reach),
            note=note,
            seconds=campaign.seconds,
        )
    place = parse_place(entry["where"])
    row = place.row if isinstance(place, Case) else place
    with examination.comparer.limit:
        result = examination.comparer.row(row)
    if result.finding is None:
        finding = Finding("unstable", place, detail=f"the rule gave {entry['rule']} in the survey, and agrees when asked again")
        return replace(_agreement(campaign, part, coverage), status="unstable", finding=finding, note=note)
    minimum = _minimum(campaign, examination, result.finding, before + result.cases)
    outcome = examination.work_out(result.finding, part, 0.0, minimum=minimum)
    return replace(outcome, seconds=campaign.seconds, note=note)


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
    coverage.skipped = skipped
    if not missing:
        return certified(finding, coverage, below)
    if campaign.terms.every:
        names = ", ".join(X.name for X in missing[:5]) + (" ..." if len(missing) > 5 else "")
        return Minimum(finding, False, below, f"all {below:,} smaller cases surveyed agree; not surveyed: {names}")
    return minimise(examination.comparer, finding, coverage, budget=examination.effort.minimise)


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
        scope = f"samples of {_HOW}, seed {campaign.terms.seed}: {', '.join(parts)}; {rows:,} rows, {cases:,} cases"
    status = "agrees" if rows and not campaign.problems else "undefined"
    if not rows:
        scope = (
            f"nothing compared: expected a row inside the premise on {where or 'the spaces named'}, got none; name larger spaces"
        )
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
    )


def _totals(campaign: Campaign) -> str:
    """What else there is to say: all failures, if they were collected; older work that counts no more."""
    words = list(campaign.stale)
    if campaign.terms.every and any(s.result.failing for s in campaign.spaces):
        found = [
            f"{s.X}: {s.result.failing:,} cases in {s.result.failing_rows:,} rows" for s in campaign.spaces if s.result.failing
        ]
        words.append(f"all failures: {'; '.join(found)}")
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
    """The record of the conjecture with this survey added; what was computed for another version of the rule is dropped.

    Raises:
        RecordError: the record beside the plug-in cannot be used, or contradicts the survey.
    """
    record = current_record(campaign.conjecture)
    if campaign.terms.draws is None:
        failing = {s.X: s.result.failing for s in campaign.spaces if campaign.terms.every}
        entries: list[Covered] = list(covered(_coverage(campaign), campaign.conjecture, cross_check=campaign.terms.cross_check))
        record = record.with_coverage(replace(entry, failing=failing.get(entry.X, 0)) for entry in entries)
    else:
        for space in campaign.spaces:
            if space.result.rows and space.complete:
                record = record.with_sample(_sample(campaign, space))
    finding = outcome.finding
    if finding is not None and outcome.status == "refuted":
        plain = outcome.as_json()
        minimal = outcome.minimum is not None and outcome.minimum.certified
        record = record.with_counterexample(Counterexample(finding.where, plain["rule"], plain["oracle"], minimal))
    return record


def write_campaign(campaign: Campaign, outcome: Outcome) -> Path:
    """Add a survey to the record beside the plug-in, and say where that is."""
    return write_record(campaign.conjecture, campaign_record(campaign, outcome))
