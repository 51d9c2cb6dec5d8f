"""From a run to the record: what was compared, the counterexample with its certificate, and the older ones, computed again."""

import hashlib
from collections.abc import Callable, Iterable
from contextlib import suppress
from dataclasses import dataclass, replace
from pathlib import Path

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import asked_while_imported
from conjcheck.errors import OutOfReach, RecordError
from conjcheck.evidence.certificate import write_certificate
from conjcheck.evidence.entries import Counterexample, Covered, Sample
from conjcheck.evidence.record import Record, current_record, record_path, write_record
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import Case, Row
from conjcheck.testing.answer import plain_value
from conjcheck.testing.compare import Comparer
from conjcheck.testing.finding import Finding
from conjcheck.testing.minimise import confirm
from conjcheck.wording import counted

__all__ = ["Recording", "asked_again", "certificate_path", "counterexample", "recording", "write_recording"]


@dataclass(frozen=True, slots=True)
class Recording:
    """What is to be written about a conjecture.

    Attributes:
        record: the record.
        note: what became of the counterexamples to earlier versions of the rule, in words; empty if there were none.
        retired: the certificates of those that refute no more.
    """

    record: Record
    note: str = ""
    retired: tuple[Path, ...] = ()


def certificate_path(conjecture: Conjecture, finding: Finding) -> Path:
    """Where the certificate of a counterexample is kept: beside the record, under a name made of the case, so that merging keeps all."""
    digest = hashlib.sha256(str(finding.where).encode()).hexdigest()
    return record_path(conjecture).with_name(f"{conjecture.name}.{digest[:8]}.certificate.json")


def counterexample(finding: Finding, conjecture: Conjecture, *, minimal: bool, confirmed_by: str) -> Counterexample:
    """The entry of a refutation. Its certificate is written beside the record; where there is none, the witnesses stand in its place.

    Args:
        finding: where rule and oracle differ.
        minimal: whether all smaller cases were compared and agree.
        confirmed_by: the other ways by which the oracle's value was found, in words.

    Cost: that of a certificate, a few seconds at most.

    Raises:
        RecordError: the certificate cannot be written, or the file of the rule cannot be read.
    """
    path = certificate_path(conjecture, finding)
    version = rule_hash(conjecture.file)
    certificate, instead = None, None
    try:
        path.parent.mkdir(exist_ok=True)
        write_certificate(
            path,
            finding.where,
            rule_value=finding.rule,
            conjecture_name=conjecture.name,
            rule_hash=version,
            ring=conjecture.ring,
        )
        certificate = path.name
    except OutOfReach as error:
        instead = f"no certificate; confirmed: {confirmed_by}" if confirmed_by else str(error)
    except OSError as error:
        raise RecordError(f"{path}: expected a file that can be written, got {error}; nothing was recorded") from error
    values = plain_value(finding.rule), plain_value(finding.oracle)
    return Counterexample(finding.where, *values, minimal, certificate=certificate, instead=instead, rule_hash=version)


def asked_again(comparer: Comparer, where: Case | Row) -> Finding | None:
    """What is wrong with the rule at one place now; ``None`` if nothing is, or the place is none of its family or premise any more.

    Raises:
        OutOfReach: no engine serves the place; and whatever the premise or the predicate of the family raises.
    """
    conjecture, row = comparer.conjecture, where.row if isinstance(where, Case) else where
    if where.X not in conjecture.on or (isinstance(where, Case) and conjecture.is_classical and any(where.d)):
        return None
    with comparer.limit:
        if not comparer.inside(row) or (isinstance(where, Case) and not comparer.admits(where)):
            return None
        return comparer.case(where) if isinstance(where, Case) else comparer.row(row).finding


def recording(
    conjecture: Conjecture,
    again: Callable[[Case | Row], Finding | None],
    *,
    coverage: Iterable[Covered] = (),
    samples: Iterable[Sample] = (),
    found: Counterexample | None = None,
) -> Recording:
    """The record of a conjecture with what a run has found, as it is to be written.

    What was compared for another version of the rule is dropped. A counterexample to another version, or to one that is not named, is
    computed again: it is renewed if it refutes the rule as it stands, and retired if it does not. Where the rule gives no value now, it
    stays what it was: a counterexample to that other version. The status is refuted if a counterexample to this version is left.

    Args:
        conjecture: the conjecture.
        again: what is wrong with the rule at a place now, see :func:`asked_again`; it may raise if that cannot be found out.
        coverage, samples: what was compared.
        found: a counterexample to the rule as it stands.

    Raises:
        RecordError: the record beside the plug-in cannot be used, or contradicts what was found; or a certificate cannot be written.
        EnginesDisagree: the oracle is in doubt.
    """
    if found is None and conjecture.role == "candidate" and asked_while_imported(conjecture):
        raise RecordError(
            f"expected evidence that is independent of the oracle, but {Path(conjecture.file).name} or a helper of it asked the oracle "
            "while it was imported; nothing was recorded: compute in the rule, and check the rule in a test"
        )
    record = current_record(conjecture)
    kept, words = [], []
    retired: list[Counterexample] = []
    for known in record.counterexamples:
        if known.rule_hash == record.rule or (found is not None and known.key == found.key):
            kept.append(known)
            continue
        try:
            finding = again(known.where)
            why = "" if finding is None or finding.status == "refuted" else f"{finding.status}: {finding.detail}"
        except Exception as error:  # of the user's premise, say, or of the process that asked
            finding, why = None, f"{type(error).__name__}: {error}"
        if why:
            kept.append(replace(known, minimal=False))
            words.append(f"the counterexample to an earlier version at {known.where} could not be computed again ({why})")
        elif finding is None:
            retired.append(known)
        else:
            finding, how = confirm(finding)
            kept.append(counterexample(finding, conjecture, minimal=False, confirmed_by=how))
    if retired:
        places = "; ".join(str(known.where) for known in retired)
        refute = "refutes" if len(retired) == 1 else "refute"
        was = "was" if len(retired) == 1 else "were"
        words.insert(0, f"{counted(len(retired), 'counterexample')} on record {refute} no more and {was} retired: {places}")
    record = replace(record, status="open", counterexamples=tuple(kept)).with_coverage(coverage)
    for sample in samples:
        record = record.with_sample(sample)
    if found is not None:
        doubtful = any(known.rule_hash != record.rule and known.where.sort_key < found.where.sort_key for known in kept)
        record = record.with_counterexample(replace(found, minimal=found.minimal and not doubtful))
    elif any(known.rule_hash == record.rule for known in kept):
        record = replace(record, status="refuted")
    files = {known.certificate for known in retired if known.certificate} - {known.certificate for known in record.counterexamples}
    folder = record_path(conjecture).parent
    return Recording(record.consistent(), "; ".join(words), tuple(folder / name for name in sorted(filter(None, files))))


def write_recording(conjecture: Conjecture, made: Recording) -> Path:
    """Write a record, remove the certificates of what was retired, and say where the record is.

    Raises:
        RecordError: see ``evidence.record.write_record``.
    """
    path = write_record(conjecture, made.record)
    for certificate in made.retired:
        with suppress(OSError):  # it proves a constant, which stays true
            certificate.unlink(missing_ok=True)
    return path
