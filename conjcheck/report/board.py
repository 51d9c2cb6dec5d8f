"""The board: all conjectures of a folder in one table, as a page and in Markdown; what cannot be used stands there, too."""

import json
import re
from collections import Counter
from collections.abc import Mapping, Sequence
from contextlib import redirect_stdout
from datetime import UTC, datetime
from functools import cache
from importlib.resources import files
from pathlib import Path
from sys import stderr
from time import perf_counter
from typing import Any
from urllib.parse import quote

from conjcheck.conjecture.declare import Conjecture
from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.errors import ConjcheckError, RecordError
from conjcheck.evidence.record import Record, read_record, read_record_file, record_path, stale_words
from conjcheck.evidence.source import rule_hash
from conjcheck.report.document import WORDS, earlier_words, scope_of_spaces, visible
from conjcheck.report.html import SIGNS, rendered
from conjcheck.report.pages import documents_of, now, page_name, write_pages
from conjcheck.testing.limits import CallInterrupted, CallLimit
from conjcheck.wording import counted

__all__ = ["board_of_documents", "board_of_folder", "board_page", "board_table", "plugin_files", "write_run"]

_IMPORT_LIMIT = 60.0
_LONGEST = 600
_UNFIT_FOR_CODE = re.compile(r"[`|]|<[/!?A-Za-z]")
_MARKS = set("\\`*_{}[]<>#!|~&$@")


def plugin_files(folder: Path) -> list[Path]:
    """The files that pytest would take for plug-ins, in order."""
    return [path for path in sorted(folder.rglob("*.py")) if _counts(path.relative_to(folder))]


def _counts(path: Path) -> bool:
    hidden = any(part.startswith(".") or part == "__pycache__" for part in path.parts)
    return not hidden and not path.name.startswith("_") and path.name != "conftest.py"


def board_of_folder(folder: Path, *, beside: Path) -> list[dict[str, Any]]:
    """One row per conjecture and per record of a folder, by file and line.

    Plug-ins are imported, so their top level runs; none of their rules is called. A plug-in that cannot be imported, a record that cannot
    be read and a record without a conjecture are rows, too.

    Args:
        folder: where plug-ins and, in folders ``records`` beside them, records lie.
        beside: where pages may lie that rows link to, with the documents of the last run.
    """
    rows, known = [], set()
    for path in plugin_files(folder):
        shown = path.relative_to(folder).as_posix()
        try:
            found = _imported(path)
        except ConjcheckError as error:
            rows.append(_row(path.stem, shown, "broken", scope=str(error)))
            continue
        for conjecture in found:
            known.add(record_path(conjecture).resolve())
            try:
                rows.append(_conjecture_row(conjecture, shown, beside))
            except ConjcheckError as error:  # a file that the rule needs cannot be read, say
                rows.append(_row(conjecture.name, shown, "broken", scope=str(error)))
    records = [path for path in sorted(folder.rglob("records/*.json")) if not path.name.endswith(".certificate.json")]
    orphans = [path for path in records if path.resolve() not in known]
    return rows + [_orphan(path, path.relative_to(folder).as_posix(), beside) for path in orphans]


def _imported(path: Path) -> list[Conjecture]:
    """The conjectures of a file; what it prints goes to standard error, and it may not take for ever."""
    with CallLimit(_IMPORT_LIMIT) as limit, redirect_stdout(stderr):
        limit.started = perf_counter()
        try:
            return conjectures_in_file(path)
        except CallInterrupted:
            raise ConjcheckError(f"importing the file took longer than {_IMPORT_LIMIT:g} s") from None
        finally:
            limit.started = 0.0


def board_of_documents(documents: Sequence[Mapping[str, Any]], pages: Sequence[Path]) -> list[dict[str, Any]]:
    """One row per document of a run, with a link to its page, which lies in the same folder."""
    return [
        _row(
            document["name"],
            Path(document["file"]).name,
            document["status"],
            scope=document["scope"],
            note="; ".join(document["notes"]),
            counterexample=document["failure"]["where"] if document["failure"] else "",
            date=document["made"],
            link=path.name,
        )
        for document, path in zip(documents, pages, strict=True)
    ]


def _row(name: str, file: str, status: str, **given: str) -> dict[str, Any]:
    row = {"scope": "", "note": "", "source": "", "counterexample": "", "date": "", "stale": "", "link": ""} | given
    row |= {"name": name, "file": file, "status": status, "word": WORDS.get(status, status), "sign": SIGNS.get(status, "!")}
    row["link"] = quote(row["link"])
    return {key: visible(value if len(value) <= _LONGEST else f"{value[:_LONGEST]} ...") for key, value in row.items()}


def _conjecture_row(conjecture: Conjecture, shown: str, beside: Path) -> dict[str, Any]:
    """A conjecture: the newest evidence about the rule as it stands, from its record or from the document of its last run.

    What its record refutes stays refuted, whatever a run said.
    """
    path, current = record_path(conjecture), rule_hash(conjecture.file)
    record, date, problem = None, "", ""
    if path.exists() or path.is_symlink():
        date = _date(path)
        try:
            record = read_record(conjecture)
        except RecordError as error:
            problem = str(error).replace(f"{path.parent}/", "")
    document, link = _last_run(conjecture, shown, beside)
    if problem:
        return _row(conjecture.name, shown, "unreadable", scope=problem, date=date, link=link)
    row = _of_record(record, current) if record else {"status": "open", "scope": "nothing on record"}
    same = document is not None and document.get("rule") == current and document["status"] != "no verdict"
    if (
        document
        and same
        and row["status"] != "refuted"
        and (not record or document["made"] >= date or not _is_about(record, current))
    ):
        where = (document["failure"] or {}).get("where", "")
        row |= {"status": document["status"], "scope": document["scope"], "counterexample": where}
        row |= {"source": "from its last run", "stale": ""}
        date = document["made"]
    elif document and not same and not row.get("stale"):
        row["stale"] = "the page is about another version of the rule" if document.get("rule") != current else ""
    return _row(conjecture.name, shown, row.pop("status"), **row, date=date, link=link)


def _is_about(record: Record, current: str) -> bool:
    """Whether a record says something about one version of the rule."""
    return bool(record.refuting(current)) or (record.rule == current and bool(record.coverage or record.samples))


def _of_record(record: Record, current: str | None) -> dict[str, str]:
    """A record, about one version of the rule if that is known, or about its own."""
    scope = scope_of_spaces(covered.as_json() for covered in record.coverage)
    sampled = sum(sample.rows for sample in record.samples)
    words = [scope] if scope else []
    words += [f"{counted(sampled, 'row')} drawn at random"] if sampled else []
    wrong_now = record.refuting(current)
    return {
        "status": "refuted" if wrong_now else "open",
        "scope": "; ".join(words) or "nothing on record about what was compared",
        "note": earlier_words([known for known in record.counterexamples if known not in wrong_now]),
        "source": "from its record",
        "counterexample": str(wrong_now[0].where) if wrong_now else "",
        "stale": stale_words(record, current) if current else "",
    }


def _orphan(path: Path, shown: str, beside: Path) -> dict[str, Any]:
    """A record that belongs to no conjecture that could be imported."""
    name = page_name(shown, path.stem)
    link = f"{name}.html" if (beside / f"{name}.html").is_file() else ""
    try:
        record = read_record_file(path)
    except RecordError as error:
        return _row(path.stem, shown, "unreadable", scope=str(error).replace(f"{path.parent}/", ""), date=_date(path), link=link)
    row = _of_record(record, None)
    row["note"] = "; ".join(
        filter(None, ["a record without a conjecture of its name in a plug-in that can be imported", row["note"]])
    )
    return _row(record.conjecture, shown, row.pop("status"), **row, date=_date(path), link=link)


def _last_run(conjecture: Conjecture, shown: str, beside: Path) -> tuple[dict[str, Any] | None, str]:
    """The document of the last run that lies beside the board, and the page to link to."""
    for name in dict.fromkeys((page_name(shown, conjecture.name), page_name("", conjecture.name))):
        if (beside / f"{name}.html").is_file():
            return _document(beside / f"{name}.json", conjecture.name), f"{name}.html"
    return None, ""


def _document(path: Path, name: str) -> dict[str, Any] | None:
    """A document of ours; anything else counts for nothing."""
    try:
        data = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError, RecursionError):
        return None
    if not isinstance(data, dict) or data.get("name") != name:
        return None
    texts = all(isinstance(data.get(key), str) for key in ("status", "scope", "made"))
    failure = data.get("failure")
    fits = texts and (failure is None or (isinstance(failure, dict) and isinstance(failure.get("where"), str)))
    of_a_run = bool(data.get("parts"))  # a page made from a record says no more than the record
    return data if fits and of_a_run and "failure" in data else None


def _date(path: Path) -> str:
    """When a file was written last, as far as the file system knows, in words that sort."""
    try:
        return f"{datetime.fromtimestamp(path.stat().st_mtime, UTC):%Y-%m-%d %H:%M} UTC"
    except OSError:
        return ""


def write_run(folder: Path, outcomes: Sequence[Mapping[str, Any]], broken: Sequence[Mapping[str, str]] = ()) -> None:
    """Write the pages of all conjectures of a run and ``index.html`` with links to them.

    Args:
        folder: made if there is none.
        outcomes: the JSON forms of all outcomes.
        broken: what could not even be collected: ``file`` and ``problem``.
    """
    documents = documents_of(outcomes, made=now())
    pages = write_pages(folder, documents)
    rows = board_of_documents(documents, pages)
    rows += [_row(Path(item["file"]).stem, Path(item["file"]).name, "broken", scope=_last_line(item["problem"])) for item in broken]
    (folder / "index.html").write_text(board_page(rows, "Conjectures of this run"), encoding="utf-8", newline="\n")


def _last_line(text: str) -> str:
    return (text.strip().splitlines() or [""])[-1]


# -- the two outputs -------------------------------------------------------------------------------------------------------


def board_page(rows: Sequence[Mapping[str, Any]], title: str, *, base: str = "") -> str:
    """The board as one HTML file; sorting and filtering need its script, reading does not.

    Args:
        rows: the rows.
        title: of the page.
        base: the way from the page to the folder of the pages that it links to, ``/`` at its end.
    """
    rows = [{**row, "link": f"{quote(base)}{row['link']}" if row["link"] else ""} for row in rows]
    statuses = [(status, WORDS.get(status, status)) for status in dict.fromkeys(row["status"] for row in rows)]
    view = {"title": visible(title), "rows": rows, "statuses": statuses, "summary": _summary(rows), "made": ""}
    return rendered("board.html", view, script=_script())


@cache
def _script() -> str:
    text = files("conjcheck.report").joinpath("board.js").read_text(encoding="utf-8")
    assert "</" not in text, "it stands inside an element"
    return text


def _summary(rows: Sequence[Mapping[str, Any]]) -> str:
    """``22 conjectures: 16 open, 6 refuted``."""
    counts = Counter(row["status"] for row in rows)
    parts = ", ".join(f"{count} {status}" for status, count in sorted(counts.items()))
    return f"{counted(len(rows), 'conjecture')}{f': {parts}' if parts else ''}"


def board_table(rows: Sequence[Mapping[str, Any]], *, base: str = "") -> str:
    """The board as a table in Markdown, for the front page of a repository.

    Args:
        rows: the rows.
        base: the way from the Markdown file to the folder of the pages, ``/`` at its end.
    """
    lines = ["| conjecture | status | compared | counterexample | date |", "|---|---|---|---|---|"]
    for row in rows:
        name = _code(row["name"])
        if row["link"]:
            name = f"[{name}]({quote(base)}{row['link']})"
        status = _plain(row["word"]) + (" (stale)" if row["stale"] else "")
        scope = f"{row['scope']} ({row['source']})" if row["source"] else row["scope"]
        scope = f"{scope}; {row['note']}" if row["source"] and row["note"] else scope
        cells = [name, status, _plain(scope), _code(row["counterexample"]), _plain(row["date"][:10])]
        lines.append(f"| {' | '.join(cells)} |")
    return "\n".join(lines) + "\n"


def _plain(text: str) -> str:
    """Text in a cell: whatever Markdown or HTML would take for a mark is written as its number."""
    return "".join(f"&#{ord(letter)};" if letter in _MARKS else letter for letter in " ".join(text.split()))


def _code(text: str) -> str:
    """Text in a cell, as code; where it holds what ends code or a cell, as that of HTML."""
    flat = " ".join(text.split())
    if not flat or _UNFIT_FOR_CODE.search(flat):
        return f"<code>{_plain(flat)}</code>" if flat else ""
    return f"`{flat}`"
