"""What is on record about a rule, held against the rule as it stands."""

from dataclasses import replace

from conjcheck.errors import NotationError, RecordError
from conjcheck.evidence.record import Record
from conjcheck.evidence.source import rule_hash
from conjcheck.testing.answer import plain_value
from conjcheck.testing.examine import Examination
from conjcheck.testing.outcome import Outcome

__all__ = ["hold_to_minimal", "recorded"]

_RETIRING = "a counterexample to an earlier version of the rule refutes no more: the survey takes it off the record"


def recorded(examination: Examination, record: Record, *, renewing: bool = False) -> Outcome:
    """Compute the counterexamples on record again, by the rule and by the oracle.

    Args:
        examination: that of the conjecture.
        record: its record.
        renewing: the record is going to be written: those of another version of the rule may refute no more, or with other values.

    Raises:
        RecordError: one of them refutes no more, or with other values.
    """
    outcome = gone = None
    version = rule_hash(examination.conjecture.file) if renewing else None
    for known in record.counterexamples:
        earlier = renewing and known.rule_hash != version
        try:
            outcome = examination.case(known.where)
        except NotationError as error:  # the place is outside the family or the premise now
            if not earlier:
                raise
            gone = gone or Outcome(examination.conjecture, "recorded", "agrees", str(error), note=_RETIRING)
            continue
        found = outcome.finding
        if earlier and (found is None or found.status == "refuted"):
            gone = gone or (replace(outcome, note=_RETIRING) if found is None else None)
            continue
        if found is None or found.status != "refuted":
            what = (
                "the rule and the oracle agree there now" if found is None else f"the rule is {found.status} there: {found.detail}"
            )
            raise RecordError(
                f"stale record: expected {examination.conjecture.name} to be refuted at {known.where}, but {what}; "
                "if the rule was repaired, record it anew with --conjcheck-record"
            )
        values = plain_value(found.rule), plain_value(found.oracle)
        recorded_values = known.rule, known.oracle
        if recorded_values not in (values, (None, None)):
            raise RecordError(
                f"stale record: expected rule {known.rule} and oracle {known.oracle} at {known.where}, "
                f"got rule {values[0]} and oracle {values[1]}; record it anew with --conjcheck-record"
            )
    outcome = gone or outcome
    assert outcome is not None, "a record is only verified when it holds a counterexample"
    return replace(outcome, part="recorded", scope=f"{len(record.counterexamples)} recorded counterexamples")


def hold_to_minimal(record: Record | None, outcome: Outcome) -> None:
    """Hold a record that calls a counterexample minimal to a survey.

    Raises:
        RecordError: the survey met a smaller one.
    """
    finding = outcome.finding
    for known in record.counterexamples if record and finding else ():
        if finding and known.minimal and finding.where.sort_key < known.where.sort_key:
            raise RecordError(
                f"stale record: expected {known.where} to be the minimal counterexample, as it is on record, but the rule already fails at "
                f"{finding.where}; record it anew with --conjcheck-record"
            )
