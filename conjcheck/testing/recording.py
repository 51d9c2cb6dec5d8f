"""From a refutation to the record: a counterexample with its certificate, as an entry that can be committed."""

import hashlib
from pathlib import Path

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import OutOfReach
from conjcheck.evidence.certificate import write_certificate
from conjcheck.evidence.entries import Counterexample
from conjcheck.evidence.record import record_path
from conjcheck.evidence.source import rule_hash
from conjcheck.testing.answer import plain_value
from conjcheck.testing.finding import Finding

__all__ = ["certificate_path", "counterexample"]


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
    """
    path = certificate_path(conjecture, finding)
    path.parent.mkdir(exist_ok=True)
    certificate, instead = None, None
    try:
        write_certificate(
            path,
            finding.where,
            rule_value=finding.rule,
            conjecture_name=conjecture.name,
            rule_hash=rule_hash(conjecture.file),
            ring=conjecture.ring,
        )
        certificate = path.name
    except OutOfReach as error:
        instead = f"no certificate; confirmed: {confirmed_by}" if confirmed_by else str(error)
    return Counterexample(
        finding.where, plain_value(finding.rule), plain_value(finding.oracle), minimal, certificate=certificate, instead=instead
    )
