"""The record of a conjecture: a small, sorted JSON file beside the plug-ins, made to be committed.

``conjectures/records/<name>.json`` holds the status and the known counterexamples, each as one line of text that parses back.
Nothing in a record is believed: a recorded counterexample is computed again, by the rule and by the oracle, every time.
"""

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.geometry.case import Case, Row

__all__ = ["Counterexample", "Record", "parse_place", "read_record", "record_path", "write_record"]

_FORMAT = "conjcheck-record"
_VERSION = 1


@dataclass(frozen=True, slots=True)
class Counterexample:
    """One recorded counterexample.

    Attributes:
        where: the case, or the row for a claim about whole products.
        rule, oracle: the two values, polynomials as text; ``None`` where there is none.
        minimal: whether all smaller cases were compared when it was recorded.
    """

    where: Case | Row
    rule: int | str | None
    oracle: int | str | None
    minimal: bool

    def as_json(self) -> dict[str, Any]:
        """The entry in the file."""
        return {"where": str(self.where), "rule": self.rule, "oracle": self.oracle, "minimal": self.minimal}


@dataclass(frozen=True, slots=True)
class Record:
    """What is on record about one conjecture; ``status`` is ``"open"`` or ``"refuted"``."""

    conjecture: str
    status: str
    counterexamples: tuple[Counterexample, ...]

    def with_counterexample(self, found: Counterexample) -> "Record":
        """The record with one more counterexample; one at the same place is replaced."""
        others = [c for c in self.counterexamples if str(c.where) != str(found.where)]
        kept = sorted([*others, found], key=lambda c: (c.where.sort_key, str(c.where)))
        return Record(self.conjecture, "refuted", tuple(kept))


def record_path(conjecture: Conjecture) -> Path:
    """Where the record of a conjecture is kept."""
    return Path(conjecture.file).parent / "records" / f"{conjecture.name}.json"


def parse_place(text: str) -> Case | Row:
    """A case, or a row when there is no arrow in the text."""
    return Case.parse(text) if "->" in text else Row.parse(text)


def read_record(conjecture: Conjecture) -> Record:
    """The record of a conjecture; an empty, open one if there is no file.

    Raises:
        RecordError: the file is no record of this conjecture; the message names the file and the entry.
    """
    path = record_path(conjecture)
    if not path.exists() and not path.is_symlink():
        return Record(conjecture.name, "open", ())
    try:
        data = json.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise RecordError(f"{path}: expected a readable file, got {error}") from None
    except (ValueError, RecursionError) as error:
        raise RecordError(f"{path}: expected JSON in UTF-8, got {error}; restore the file or delete it") from None
    if not isinstance(data, dict) or data.get("format") != _FORMAT:
        raise RecordError(f'{path}: expected an object with "format": "{_FORMAT}"; this is not a record')
    if data.get("version") != _VERSION:
        raise RecordError(f"{path}: expected version {_VERSION}, got {data.get('version')!r}; use the conjcheck that wrote it")
    if data.get("conjecture") != conjecture.name:
        raise RecordError(f"{path}: expected the record of {conjecture.name!r}, got that of {data.get('conjecture')!r}")
    if data.get("status") not in ("open", "refuted"):
        raise RecordError(f'{path}: expected "status" to be "open" or "refuted", got {data.get("status")!r}')
    entries = data.get("counterexamples")
    if not isinstance(entries, list):
        raise RecordError(f'{path}: expected a list under "counterexamples", got {entries!r}')
    found = tuple(_entry(path, place, entry) for place, entry in enumerate(entries, start=1))
    if data["status"] == "refuted" and not found:
        raise RecordError(f"{path}: expected a counterexample, since the status is refuted, got none")
    return Record(conjecture.name, data["status"], found)


def _entry(path: Path, place: int, entry: object) -> Counterexample:
    """One counterexample of the file, validated."""
    if not isinstance(entry, dict) or not isinstance(entry.get("where"), str):
        raise RecordError(f'{path}: expected an object with a text under "where" as counterexample {place}, got {entry!r}')
    for key in ("rule", "oracle"):
        value = entry.get(key)
        if value is not None and not isinstance(value, str) and (type(value) is not int or value < 0):
            raise RecordError(
                f'{path}: expected null, an integer of 0 or more, or a polynomial as text under "{key}" of counterexample {place}, '
                f"got {value!r}"
            )
    try:
        where = parse_place(entry["where"])
    except ConjcheckError as error:
        raise RecordError(f"{path}: counterexample {place}: {error}") from None
    return Counterexample(where, entry.get("rule"), entry.get("oracle"), entry.get("minimal") is True)


def write_record(conjecture: Conjecture, record: Record) -> Path:
    """Write the record of a conjecture and return where."""
    path = record_path(conjecture)
    path.parent.mkdir(exist_ok=True)
    data = {
        "format": _FORMAT,
        "version": _VERSION,
        "conjecture": record.conjecture,
        "status": record.status,
        "counterexamples": [c.as_json() for c in record.counterexamples],
    }
    path.write_text(json.dumps(data, indent=2, ensure_ascii=False) + "\n", encoding="utf-8")
    return path
