"""From the JSON of a record to its entries: every key, type and range is looked at, and what is wrong is named."""

import math
import re
from collections.abc import Callable
from typing import Any

from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.evidence.entries import Counterexample, Covered, Sample
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import FlagVariety

__all__ = ["FORMAT", "RINGS", "VERSION", "contents", "parse_place"]

FORMAT = "conjcheck-record"
VERSION = 1
RINGS = ("", "quantum", "classical", "equivariant quantum", "equivariant")

_NEEDED = {"format", "version", "conjecture", "status", "counterexamples"}
_KEYS = _NEEDED | {"file", "statement", "ring", "premise", "rule", "coverage", "samples"}
_HASH = re.compile(r"sha256:[0-9a-f]{64}")
_FILE_NAME = re.compile(r"[^/\\\0.][^/\\\0]*")


def parse_place(text: str) -> Case | Row:
    """A case, or a row when there is no arrow in the text."""
    return Case.parse(text) if "->" in text else Row.parse(text)


def contents(data: object) -> dict[str, Any]:
    """What a record says, validated, by the names of the fields of ``Record``.

    Raises:
        RecordError: it is no record; the message names the entry, but not the file.
    """
    if not isinstance(data, dict) or data.get("format") != FORMAT:
        what = "this is a certificate, not a record" if _format(data) == "conjcheck-certificate" else "this is not a record"
        raise RecordError(
            f'expected an object with "format": "{FORMAT}"; {what}, which is a file such as conjectures/records/NAME.json'
        )
    if type(data.get("version")) is not int or data["version"] != VERSION:
        raise RecordError(f"expected version {VERSION}, got {data.get('version')!r}; use the conjcheck that wrote it")
    _known_keys(data, _KEYS, "the record")
    if not isinstance(data.get("conjecture"), str) or not data["conjecture"].isidentifier():
        raise RecordError(f'expected the name of a conjecture under "conjecture", got {data.get("conjecture")!r}')
    if data.get("status") not in ("open", "refuted"):
        raise RecordError(f'expected "status" to be "open" or "refuted", got {data.get("status")!r}')
    rule, statement = data.get("rule"), data.get("statement", "")
    if rule is not None and not (isinstance(rule, str) and _HASH.fullmatch(rule)):
        raise RecordError(f'expected null, or "sha256:" and 64 hexadecimal digits, under "rule", got {rule!r}')
    file = data.get("file")
    if file is not None and not (isinstance(file, str) and _FILE_NAME.fullmatch(file)):
        raise RecordError(f'expected null or the name of the plug-in file under "file", got {file!r}')
    if not isinstance(statement, str):
        raise RecordError(f'expected a text under "statement", got {statement!r}')
    if data.get("ring", "") not in RINGS:
        raise RecordError(f'expected one of {", ".join(map(repr, RINGS))} under "ring", got {data["ring"]!r}')
    if type(data.get("premise")) not in (bool, type(None)):
        raise RecordError(f'expected true, false or null under "premise", got {data["premise"]!r}')
    found = {
        "conjecture": data["conjecture"],
        "status": data["status"],
        "file": file,
        "statement": statement,
        "ring": data.get("ring", ""),
        "premise": data.get("premise"),
        "rule": rule,
        "coverage": _entries(data.get("coverage", []), "coverage", "entry {} of the coverage", _covered),
        "samples": _entries(data.get("samples", []), "samples", "sample {}", _sample),
        "counterexamples": _entries(data.get("counterexamples"), "counterexamples", "counterexample {}", _counterexample),
    }
    if data["status"] == "refuted" and not found["counterexamples"]:
        raise RecordError("expected a counterexample, since the status is refuted, got none")
    if rule is None and (found["coverage"] or found["samples"]):
        raise RecordError('expected the hash of the rule under "rule", since there is coverage or a sample, got none')
    return found


def _format(data: object) -> object:
    return data.get("format") if isinstance(data, dict) else None


def _entries(data: object, key: str, name: str, read: Callable[[Any, str], Any]) -> tuple[Any, ...]:
    """The entries of one list; ``name`` has a place for the number of the entry."""
    if not isinstance(data, list):
        raise RecordError(f'expected a list under "{key}", got {data!r}')
    return tuple(read(entry, name.format(place)) for place, entry in enumerate(data, start=1))


def _known_keys(data: dict[str, Any], known: set[str], what: str) -> None:
    unknown = [key for key in data if key not in known]
    if unknown:
        raise RecordError(f"expected only the keys {', '.join(sorted(known))} in {what}, got {unknown[0]!r}")


def _counterexample(entry: Any, what: str) -> Counterexample:
    if not isinstance(entry, dict) or not isinstance(entry.get("where"), str):
        raise RecordError(f'expected an object with a text under "where" as {what}, got {entry!r}')
    _known_keys(entry, {"where", "rule", "oracle", "minimal", "certificate", "instead", "rule_hash"}, what)
    version = entry.get("rule_hash")
    if version is not None and not (isinstance(version, str) and _HASH.fullmatch(version)):
        raise RecordError(f'expected null, or "sha256:" and 64 hexadecimal digits, under "rule_hash" of {what}, got {version!r}')
    for key in ("rule", "oracle"):
        value = entry.get(key)
        if value is not None and not isinstance(value, str) and (type(value) is not int or value < 0):
            raise RecordError(
                f'expected null, an integer of 0 or more, or a polynomial as text under "{key}" of {what}, got {value!r}'
            )
    if type(entry.get("minimal", False)) is not bool:
        raise RecordError(f'expected true or false under "minimal" of {what}, got {entry["minimal"]!r}')
    certificate, instead = entry.get("certificate"), entry.get("instead")
    if certificate is not None and not (isinstance(certificate, str) and _FILE_NAME.fullmatch(certificate)):
        raise RecordError(
            f'expected null or the name of a file beside the record under "certificate" of {what}, got {certificate!r}'
        )
    if instead is not None and not (isinstance(instead, str) and instead):
        raise RecordError(f'expected null or a text under "instead" of {what}, got {instead!r}')
    if certificate is not None and instead is not None:
        raise RecordError(f'expected either "certificate" or "instead" in {what}, got both')
    try:
        where = parse_place(entry["where"])
    except ConjcheckError as error:
        raise RecordError(f"{what}: {error}") from None
    values = entry.get("rule"), entry.get("oracle")
    return Counterexample(where, *values, entry.get("minimal", False), certificate, instead, version)


def _covered(entry: Any, what: str) -> Covered:
    counts = ("rows", "seen", "cases", "nonzero", "failing")
    X = _space(entry, what, {"space", *counts, "of", "seconds", "engine", "conjcheck"})
    numbers = {key: _count(entry, key, what) for key in counts}
    seconds = entry.get("seconds")
    if isinstance(seconds, bool) or not isinstance(seconds, (int, float)) or not 0 <= seconds < math.inf:
        raise RecordError(f'expected seconds, a number of 0 or more, under "seconds" of {what}, got {seconds!r}')
    covered = Covered(X, **numbers, seconds=seconds, engine=_text(entry, "engine", what), conjcheck=_text(entry, "conjcheck", what))
    if type(entry.get("of")) is not int or entry["of"] != covered.of:
        raise RecordError(f'expected {covered.of}, the number of rows of {X}, under "of" of {what}, got {entry.get("of")!r}')
    for less, more in (("rows", "seen"), ("seen", "of"), ("rows", "cases"), ("nonzero", "cases"), ("failing", "cases")):
        _at_most(entry, less, more, what)
    if covered.cases and not covered.rows:
        raise RecordError(f'expected no "cases" without "rows" in {what}, got {covered.cases}')
    return covered


def _sample(entry: Any, what: str) -> Sample:
    X = _space(entry, what, {"space", "how", "seed", "rows", "cases", "failing", "bound", "conjcheck"})
    rows, cases, failing = (_count(entry, key, what) for key in ("rows", "cases", "failing"))
    seed = entry.get("seed")
    if type(seed) is not int:
        raise RecordError(f'expected an integer under "seed" of {what}, got {seed!r}')
    sample = Sample(X, _text(entry, "how", what), seed, rows, cases, failing, _text(entry, "conjcheck", what))
    _at_most(entry, "failing", "rows", what)
    _at_most(entry, "rows", "cases", what)
    if cases and not rows:
        raise RecordError(f'expected no "cases" without "rows" in {what}, got {cases}')
    if entry.get("bound") not in (sample.bound, sample.share):  # the share was once stated of few rows, too
        raise RecordError(
            f'expected {sample.bound!r} under "bound" of {what}, which follows from "rows" and "failing", got {entry.get("bound")!r}'
        )
    return sample


def _space(entry: Any, what: str, known: set[str]) -> FlagVariety:
    """The space of an entry that is an object with known keys."""
    if not isinstance(entry, dict) or not isinstance(entry.get("space"), str):
        raise RecordError(f'expected an object with the name of a space under "space" as {what}, got {entry!r}')
    _known_keys(entry, known, what)
    try:
        return FlagVariety(entry["space"])
    except ConjcheckError as error:
        raise RecordError(f"{what}: {error}") from None


def _count(entry: dict[str, Any], key: str, what: str) -> int:
    value = entry.get(key)
    if type(value) is not int or value < 0:
        raise RecordError(f'expected an integer of 0 or more under "{key}" of {what}, got {value!r}')
    return value


def _at_most(entry: dict[str, Any], less: str, more: str, what: str) -> None:
    if entry[less] > entry[more]:
        raise RecordError(f'expected at most {entry[more]}, the "{more}", under "{less}" of {what}, got {entry[less]}')


def _text(entry: dict[str, Any], key: str, what: str) -> str:
    value = entry.get(key)
    if not isinstance(value, str) or not value:
        raise RecordError(f'expected a text under "{key}" of {what}, got {value!r}')
    return value
