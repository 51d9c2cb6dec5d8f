"""Pages as files: which outcomes belong to one conjecture, how its file is named, and where its record lies."""

import json
import re
from collections.abc import Iterable, Mapping, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.evidence.record import hold_to_file, parse_place, read_record_file, stale_words
from conjcheck.geometry.case import Case
from conjcheck.oracle import Product, product
from conjcheck.report.document import document_of_outcomes, document_of_record, visible
from conjcheck.report.html import page
from conjcheck.testing.answer import plain_value
from conjcheck.testing.outcome import plain_product

__all__ = ["document_of_record_file", "documents_of", "now", "page_name", "record_beside", "write_pages"]

_LONGEST_NAME = 120


def now() -> str:
    """The date and time of this moment, in words that sort."""
    return f"{datetime.now(UTC):%Y-%m-%d %H:%M} UTC"


def documents_of(outcomes: Iterable[Mapping[str, Any]], *, made: str = "") -> list[dict[str, Any]]:
    """One document per conjecture from the JSON forms of all outcomes of a run, each with its record and the hash of its rule."""
    by_conjecture: dict[tuple[str, str], list[Mapping[str, Any]]] = {}
    for outcome in outcomes:
        by_conjecture.setdefault((str(outcome.get("file")), str(outcome.get("conjecture"))), []).append(outcome)
    found = []
    for (file, name), parts in by_conjecture.items():
        document = document_of_outcomes(parts, record=record_beside(file, name), made=made)
        hashes = {part.get("rule_hash") for part in parts}
        document["rule"] = found_hash if len(hashes) == 1 and isinstance(found_hash := hashes.pop(), str) else ""
        if document["record"] and document["rule"]:
            try:
                record = read_record_file(_record_path(file, name))
                hold_to_file(f"{name}.json", record.file, Path(file).name, name)
                document["record"]["stale"] = stale_words(record, document["rule"])
            except RecordError as error:
                document["record"] = {"problem": visible(str(error))}
        found.append(document)
    return found


def document_of_record_file(data: object, *, file: str, made: str = "") -> dict[str, Any]:
    """The document of a record, with the oracle's product at its first counterexample, computed now, where that is quick.

    A value on record that is not the oracle's is said to be so: a record is not believed.
    """
    document = document_of_record(data, file=file, made=made)
    failure = document["failure"]
    if not failure or document["about"]["ring"].startswith("equivariant"):
        return document
    try:
        place = parse_place(failure["where"])
        terms = product(place.u, place.v)
    except ConjcheckError:
        return document
    if document["about"]["ring"] == "classical":
        terms = Product({(w, d): count for (w, d), count in terms.items() if not any(d)})
    failure["products"] = {"rule": None, "oracle": plain_product(terms), "partial": False}
    document["notes"].append("the product by the oracle was computed for this page")
    if isinstance(place, Case) and failure["oracle"] not in (None, true := plain_value(terms.get((place.w, place.d), 0))):
        document["notes"].append(f"the record is wrong: the oracle gives {true} there, not {failure['oracle']}")
    return document


def record_beside(file: str, name: str) -> dict[str, Any] | None:
    """The JSON of the record of a conjecture, ``None`` if there is none; what is no JSON object is one that is no record."""
    if not name.isidentifier():
        return None
    try:
        data = json.loads(_record_path(file, name).read_text(encoding="utf-8"))
    except OSError:
        return None
    except (ValueError, RecursionError):
        return {}
    return data if isinstance(data, dict) else {}


def _record_path(file: str, name: str) -> Path:
    return Path(file).parent / "records" / f"{name}.json"


def page_name(file: str, name: str) -> str:
    """The name of the page of a conjecture, without ending; safe on every file system. A page from a JSON file is named like it.

    >>> page_name("conjectures/rim_hooks.py", "rim_hooks"), page_name("conjectures/bounds.py", "at most/one")
    ('rim_hooks', 'bounds.at_most_one')
    """
    stem = Path(file).stem
    text = name if stem in ("", name) else stem if file.endswith(".json") else f"{stem}.{name}"
    return re.sub(r"[^\w.-]", "_", text)[:_LONGEST_NAME].lstrip(".") or "_"


def write_pages(folder: Path, documents: Sequence[Mapping[str, Any]]) -> list[Path]:
    """Write the page of each document, and the document itself beside it as JSON; returns the pages in order.

    Two documents of one name get two files.
    """
    folder.mkdir(parents=True, exist_ok=True)
    used: set[str] = set()
    written = []
    for document in documents:
        plain = name = page_name(document["file"], document["name"])
        number = 1
        while name.casefold() in used or name.casefold() == "index":
            number += 1
            name = f"{plain}-{number}"
        used.add(name.casefold())
        path = folder / f"{name}.html"
        path.write_text(page(document), encoding="utf-8", newline="\n")
        (folder / f"{name}.json").write_text(json.dumps(document, indent=1) + "\n", encoding="utf-8", newline="\n")
        written.append(path)
    return written
