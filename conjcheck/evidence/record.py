"""The record of a conjecture: a small, sorted JSON file beside the plug-ins, made to be committed, merged and cited.

``conjectures/records/<name>.json`` holds the status, what was compared (for one version of the rule, known by its hash), and the known
counterexamples, each as one line of text that parses back. ``record.schema.json`` beside this module describes the file. Nothing in a
record is believed: a recorded counterexample is computed again, by the rule and by the oracle, every time.
"""

import json
import os
import shutil
import sys
from collections.abc import Iterable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, TypeVar

from conjcheck.conjecture.declare import Conjecture
from conjcheck.errors import RecordError
from conjcheck.evidence.entries import Counterexample, Covered, Sample, refuting
from conjcheck.evidence.reading import FORMAT, VERSION, contents, parse_place
from conjcheck.evidence.source import rule_hash
from conjcheck.geometry.case import Case, place_of_row
from conjcheck.wording import counted

if sys.platform != "win32":
    import fcntl

__all__ = [
    "Counterexample",
    "Covered",
    "Record",
    "Sample",
    "current_record",
    "hold_to_file",
    "merge",
    "parse_place",
    "read_record",
    "read_record_file",
    "record_path",
    "record_text",
    "records_held",
    "stale_words",
    "write_record",
    "write_record_file",
]

_UNKNOWN = ("", None)
_Entry = TypeVar("_Entry", Counterexample, Covered, Sample)


@dataclass(frozen=True, slots=True)
class Record:
    """What is on record about one conjecture. Entries are kept in order, and those about one thing are joined, when a record is made.

    Attributes:
        conjecture: its name.
        status: ``"open"`` or ``"refuted"``.
        counterexamples: the known ones, each with the version of the rule that it refuted; they are computed again at every run.
        statement, ring: as declared, the statement in LaTeX; empty if not known.
        premise: whether the conjecture has a premise, so that only rows and cases inside it count; ``None`` if not known.
        rule: the hash of the rule that coverage and samples speak about, see ``evidence.source``; ``None`` if there are none.
        coverage: how far spaces were compared in order, one entry per space.
        samples: rows drawn at random.
        file: the name of the plug-in file; ``None`` if not known.

    Raises:
        RecordError: entries that contradict each other; the message names them.
    """

    conjecture: str
    status: str
    counterexamples: tuple[Counterexample, ...] = ()
    statement: str = ""
    ring: str = ""
    premise: bool | None = None
    rule: str | None = None
    coverage: tuple[Covered, ...] = ()
    samples: tuple[Sample, ...] = ()
    file: str | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "counterexamples", _in_order(self.counterexamples))
        object.__setattr__(self, "coverage", _in_order(self.coverage))
        object.__setattr__(self, "samples", _in_order(self.samples))
        if self.rule is None and (self.coverage or self.samples):
            raise RecordError(
                f"expected the hash of the rule in the record of {self.conjecture}, since it has coverage or a sample, got none; "
                "use renewed(hash) first"
            )
        for smaller, larger in zip(self.counterexamples, self.counterexamples[1:], strict=False):
            if larger.minimal and larger.where.sort_key > smaller.where.sort_key:
                raise RecordError(
                    f"expected no counterexample smaller than {larger.where}, which is on record as minimal, got {smaller.where}; "
                    'compute them again and put "minimal" right'
                )

    def with_counterexample(self, found: Counterexample) -> "Record":
        """The record with one more counterexample; one at the same place is replaced, larger ones are not minimal any more.

        A certificate is kept as long as the values are the same.
        """
        others = []
        for known in self.counterexamples:
            if known.key == found.key:
                same = (known.rule, known.oracle, known.rule_hash) == (found.rule, found.oracle, found.rule_hash)
                if same and found.certificate is None and found.instead is None:
                    found = replace(found, certificate=known.certificate, instead=known.instead)
            elif known.minimal and known.where.sort_key > found.where.sort_key:
                others.append(replace(known, minimal=False))
            else:
                others.append(known)
        return replace(self, status="refuted", counterexamples=(*others, found))

    def with_coverage(self, covered: Iterable[Covered]) -> "Record":
        """The record with more coverage; of two entries for one space the one that went further is kept, or else the one on record.

        Raises:
            RecordError: the record is of no rule yet (use ``renewed``), or the numbers contradict those on record.
        """
        known = {entry.X: entry for entry in self.coverage}
        joined = replace(self, coverage=(*self.coverage, *covered)).coverage
        as_far = {entry.X: known[entry.X] for entry in joined if entry.X in known and known[entry.X].seen == entry.seen}
        return replace(self, coverage=tuple(as_far.get(entry.X, entry) for entry in joined))

    def with_sample(self, sample: Sample) -> "Record":
        """The record with one more sample; of two with one seed the larger one is kept.

        Raises:
            RecordError: as with coverage.
        """
        return replace(self, samples=(*self.samples, sample))

    def consistent(self) -> "Record":
        """The record itself.

        Raises:
            RecordError: it holds a counterexample where it says that everything was compared and agrees, both for one version of the rule.
        """
        agreed = {entry.X: entry.seen for entry in self.coverage if not entry.failing}
        for known in self.counterexamples:
            row = known.where.row if isinstance(known.where, Case) else known.where
            if known.rule_hash == self.rule and row.X in agreed and place_of_row(row) < agreed[row.X]:
                raise RecordError(
                    f"expected agreement or a counterexample at {known.where}, got both for one version of the rule {self.conjecture}: "
                    f"{agreed[row.X]:,} rows of {row.X} are said to agree; the rule depends on something that its hash does not see, or an "
                    "entry is wrong: compute both again"
                )
        return self

    def is_stale(self, rule: str) -> bool:
        """Whether it holds coverage or samples of another version of the rule."""
        return bool(self.coverage or self.samples) and self.rule != rule

    def refuting(self, rule: str | None = None) -> list[Counterexample]:
        """The counterexamples to one version of the rule, if the status is refuted; without a hash to that on record."""
        return refuting(self.counterexamples, self.rule, rule) if self.status == "refuted" else []

    def renewed(self, rule: str) -> "Record":
        """The record of this version of the rule: coverage and samples of another one are dropped, counterexamples stay."""
        return self if self.rule == rule else replace(self, rule=rule, coverage=(), samples=())


def _in_order(entries: Iterable[_Entry]) -> tuple[_Entry, ...]:
    """The entries in order, those about one thing joined."""
    found: dict[Any, _Entry] = {}
    for entry in entries:
        known = found.get(entry.key)
        found[entry.key] = entry if known is None else known.joined(entry)
    return tuple(sorted(found.values(), key=lambda entry: entry.sort_key))


def stale_words(record: Record, rule: str) -> str:
    """What in a record was computed for another version of the rule, in words; empty if nothing was."""
    if not record.is_stale(rule):
        return ""
    parts = []
    if record.coverage:
        parts.append(
            f"coverage of {counted(len(record.coverage), 'space')}, {counted(sum(c.rows for c in record.coverage), 'row')}"
        )
    if record.samples:
        parts.append(f"{counted(len(record.samples), 'sample')}, {counted(sum(s.rows for s in record.samples), 'row')}")
    many = len(parts) > 1 or (not record.coverage and len(record.samples) > 1)
    was, counts = ("were", "count") if many else ("was", "counts")
    return f"{', and '.join(parts)}, {was} computed for another version of the rule and {counts} no more"


def merge(first: Record, second: Record) -> Record:
    """One record from two of one rule, so that two people's surveys add up. Commutative, associative, idempotent.

    A record without a hash (it holds counterexamples only) goes with any. The status is refuted if one of them says so.

    Raises:
        RecordError: two conjectures, two versions of the rule, or entries that contradict each other; the message names the entry.
    """
    if first.conjecture != second.conjecture:
        raise RecordError(f"expected two records of one conjecture, got {first.conjecture} and {second.conjecture}")

    def one(what: str, key: str) -> Any:
        mine, its = getattr(first, key), getattr(second, key)
        if mine in _UNKNOWN or its in _UNKNOWN:
            return its if mine in _UNKNOWN else mine
        if mine != its:
            raise RecordError(
                f"expected one {what} in both records of {first.conjecture}, got {mine} and {its}; "
                "survey anew with the rule as it stands, or keep one of the records"
            )
        return mine

    return Record(
        first.conjecture,
        "refuted" if "refuted" in (first.status, second.status) else "open",
        first.counterexamples + second.counterexamples,
        statement=one("statement", "statement"),
        ring=one("ring", "ring"),
        premise=one("answer to whether there is a premise", "premise"),
        file=one("plug-in file", "file"),
        rule=one("hash of the rule", "rule"),
        coverage=first.coverage + second.coverage,
        samples=first.samples + second.samples,
    ).consistent()


def record_path(conjecture: Conjecture) -> Path:
    """Where the record of a conjecture is kept."""
    return Path(conjecture.file).parent / "records" / f"{conjecture.name}.json"


def record_text(record: Record) -> str:
    """The text of the file: sorted, one line per space and sample, a block of lines per counterexample; the same for the same record."""
    head: dict[str, Any] = {"format": FORMAT, "version": VERSION, "conjecture": record.conjecture, "status": record.status}
    head |= {key: getattr(record, key) for key in ("file", "statement", "ring", "premise", "rule")}
    lines = [f'  "{key}": {_json(value)}' for key, value in head.items()]
    for key, entries in (("coverage", record.coverage), ("samples", record.samples)):
        body = ",\n".join(f"    {_json(entry.as_json())}" for entry in entries)
        lines.append(f'  "{key}": [\n{body}\n  ]' if body else f'  "{key}": []')
    blocks = json.dumps([c.as_json() for c in record.counterexamples], indent=2, ensure_ascii=False)
    lines.append('  "counterexamples": ' + blocks.replace("\n", "\n  "))
    return "{\n" + ",\n".join(lines) + "\n}\n"


def _json(value: object) -> str:
    return json.dumps(value, ensure_ascii=False)


def read_record(conjecture: Conjecture) -> Record:
    """The record of a conjecture; an empty, open one if there is no file.

    Raises:
        RecordError: the file is no record of this conjecture, but, say, of one in another file; the message names the file and the entry.
    """
    path = record_path(conjecture)
    if not path.exists() and not path.is_symlink():
        return Record(conjecture.name, "open", ())
    record = read_record_file(path)
    if record.conjecture != conjecture.name:
        raise RecordError(f"{path}: expected the record of {conjecture.name!r}, got that of {record.conjecture!r}")
    hold_to_file(path, record.file, Path(conjecture.file).name, conjecture.name)
    return record


def hold_to_file(path: str | Path, recorded: str | None, file: str | None, name: str) -> None:
    """Two conjectures of one name in two files of a folder would share one record: refuse that.

    Raises:
        RecordError: the file that the record at ``path`` names is not that of the conjecture; ``None`` is any.
    """
    if None not in (recorded, file) and recorded != file:
        raise RecordError(
            f"{path}: expected the record of {name} in {file}, got that of {name} in {recorded}; one folder keeps one record for a name: "
            f'rename one of the two functions, or, if {recorded} itself was renamed, write "{file}" under "file" in the record'
        )


def current_record(conjecture: Conjecture) -> Record:
    """The record of a conjecture as it stands now: what was computed for another version of the rule is dropped.

    Raises:
        RecordError: as for :func:`read_record`; or the file of the rule cannot be read.
    """
    record = replace(
        read_record(conjecture),
        statement=conjecture.statement,
        ring=conjecture.ring,
        premise=conjecture.premise is not None,
        file=Path(conjecture.file).name,
    )
    return record.renewed(rule_hash(conjecture.file))


def read_record_file(path: str | Path) -> Record:
    """The record in a file, of any conjecture. Entries may stand in any order; a space that stands twice counts once.

    Raises:
        RecordError: the file is no record; the message names the file and the entry.
    """
    try:
        data = json.loads(Path(path).read_text(encoding="utf-8"), object_pairs_hook=_once, parse_constant=_no_number)
    except OSError as error:
        raise RecordError(f"{path}: expected a readable file, got {error}") from None
    except RecordError as error:
        raise RecordError(f"{path}: {error}") from None
    except (ValueError, RecursionError) as error:
        if Path(path).suffix != ".json":
            raise RecordError(
                f"{path}: expected a record such as conjectures/records/NAME.json, got a file of another kind"
            ) from None
        raise RecordError(
            f"{path}: expected JSON in UTF-8, got {error}; restore the file, or move it away and record anew with --conjcheck-record"
        ) from None
    try:
        return Record(**contents(data))
    except RecordError as error:
        raise RecordError(f"{path}: {error}") from None


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    """An object of the file; a key that stands twice, as after a careless merge, is refused."""
    found: dict[str, Any] = {}
    for key, value in pairs:
        if key in found:
            raise RecordError(f"expected every key once in an object, got {key!r} twice; keep one of the two")
        found[key] = value
    return found


def _no_number(text: str) -> None:
    raise ValueError(f"{text}, which is no number")


def write_record(conjecture: Conjecture, record: Record) -> Path:
    """Write the record of a conjecture and return where.

    Raises:
        RecordError: see :func:`write_record_file`.
    """
    path = record_path(conjecture)
    with _writing(path):
        path.parent.mkdir(exist_ok=True)
    write_record_file(path, record)
    return path


@contextmanager
def records_held(conjecture: Conjecture) -> Iterator[None]:
    """Hold the records beside a plug-in, from reading one until it is written; others wait, so that two surveys that end at once add up.

    The lock is on the folder of the plug-in, and the system takes it off a process that dies; where there are no such locks (on
    Windows, on some network disks), nobody waits.

    Raises:
        RecordError: there is no such folder, or it cannot be read.
    """
    if sys.platform == "win32":
        yield
        return
    folder = Path(conjecture.file).parent
    with _writing(folder):
        handle = os.open(folder, os.O_RDONLY)
    try:
        with suppress(OSError):  # a file system without locks
            fcntl.flock(handle, fcntl.LOCK_EX)
        yield
    finally:
        os.close(handle)


@contextmanager
def _writing(path: str | Path) -> Iterator[None]:
    """What the system refuses is told as an error of the record."""
    try:
        yield
    except OSError as error:
        raise RecordError(f"{path}: expected a file that can be written, got {error}; nothing was recorded") from error


def write_record_file(path: str | Path, record: Record) -> None:
    """Write a record in one step: whoever reads the file meanwhile sees the old text or the new one, never a part.

    Raises:
        RecordError: what is there is no record of the same conjecture, or the record would not be read back, or the folder or the disk
            takes nothing; nothing is written.
    """
    place = Path(os.path.realpath(path))
    if place.exists():
        try:
            there = read_record_file(place)
        except RecordError as error:
            raise RecordError(f"{error}; nothing was written, lest something is lost") from None
        if there.conjecture != record.conjecture:
            raise RecordError(
                f"{path}: expected the record of {record.conjecture!r} to write over, got that of {there.conjecture!r}"
            )
        hold_to_file(path, there.file, record.file, record.conjecture)
    text = record_text(record)
    if (again := Record(**contents(json.loads(text)))) != record:
        raise RecordError(f"{path}: expected a record that is read back as it is, got {record}, which becomes {again}")
    draft = place.with_name(f".{place.name}.{os.getpid()}")
    with _writing(path):
        try:
            draft.write_text(text, encoding="utf-8", newline="\n")
            if place.exists():
                shutil.copymode(place, draft)
            draft.replace(place)
        finally:
            draft.unlink(missing_ok=True)
