"""What a page says, as a plain document in JSON types: from the outcomes of a run, from a record, or from both.

pytest, its parallel runs, saved outcomes and records all make the same document, and so the same page. Everything in it is read with
suspicion: a text is a text and a number is a number, whatever the file said.
"""

import json
import re
from collections.abc import Iterable, Mapping, Sequence
from pathlib import PurePath
from typing import Any

from conjcheck.errors import RecordError
from conjcheck.evidence.entries import Counterexample, refuting
from conjcheck.evidence.reading import FORMAT, contents
from conjcheck.wording import counted

__all__ = [
    "WORDS",
    "document_of_outcomes",
    "document_of_record",
    "earlier_words",
    "is_outcome",
    "scope_of_spaces",
    "unreadable",
    "verdict_of",
    "visible",
]

_LONGEST = 20_000
_MOST = 2_000

_INVISIBLE = re.compile(
    "[\\x00-\\x08\\x0b-\\x1f\\x7f-\\x9f\\u061c\\u200b\\u200e\\u200f\\u2028-\\u202e\\u2066-\\u2069\\ufeff\\ud800-\\udfff]"
)

WORDS = {
    "agrees": "agrees as far as checked",
    "refuted": "refuted",
    "crashed": "the rule crashed",
    "unstable": "the rule is unstable",
    "too-slow": "the rule is too slow",
    "not-a-count": "the rule gives no count",
    "undefined": "the rule is undefined",
    "not-independent": "the rule asked the oracle",
    "no verdict": "no verdict",
    "open": "open",
    "unreadable": "the record cannot be read",
    "broken": "the plug-in cannot be used",
}
"""Every status that a document can have, in words."""


def document_of_outcomes(
    outcomes: Sequence[Mapping[str, Any]], *, record: Mapping[str, Any] | None = None, made: str = ""
) -> dict[str, Any]:
    """The document of one conjecture from the JSON forms of the outcomes of its parts (``Outcome.as_json``).

    Args:
        outcomes: all of one conjecture, at least one, in the order in which they ran.
        record: the JSON of its record, if there is one; a record that cannot be read is said to be so.
        made: when, in words.
    """
    parts = [_part(outcome) for outcome in outcomes]
    if not parts:
        raise ValueError("expected at least one outcome, got none")
    plain = [{"conjecture": "", **part} for part in parts]
    said = verdict_of(plain)
    place = next((k for k, part in enumerate(plain) if part is said), None)
    main = {**outcomes[0], **said} if place is None else outcomes[place]
    spaces = [_space(space) for outcome in outcomes for space in _list(outcome.get("spaces"))]
    document = _empty(_text(main.get("conjecture")), made) | {
        "file": _text(main.get("file")),
        "status": _text(main.get("status")),
        "verdict": _text(main.get("verdict")),
        "scope": _text(main.get("scope")),
        "minimal": main.get("minimal") is True,
        "about": _about(main.get("about")),
        "notes": list(dict.fromkeys(note for outcome in outcomes if (note := _text(outcome.get("note"))))),
        "parts": parts,
        "spaces": spaces,
        "replay": _text(main.get("replay")),
        "environment": _text(main.get("environment")),
        "seed": next((part["seed"] for part in parts if part["seed"]), ""),
        "failure": _failure(main) if place is not None and said["status"] != "agrees" and "detail" in main else None,
        "diagnosis": main.get("diagnosis"),
    }
    if record is not None:
        document["record"] = _record(record)
    return document


def verdict_of(parts: Sequence[Mapping[str, Any]]) -> Mapping[str, Any]:
    """Which of the parts of one conjecture, in JSON form, speaks for all: the gravest failure, else what was compared in order.

    Laws and rows drawn at random alone are never agreement: where the survey did not run to its end, there is no verdict.
    """
    failed = max((part for part in parts if part["status"] != "agrees"), key=lambda part: part["cases"], default=None)
    compared = next((part for part in parts if part["part"] == "survey" or part["part"].startswith(("case", "sample"))), None)
    if failed or compared:
        return failed or compared or {}
    why = f"the survey did not run, or not to its end; {parts[0]['scope']}"
    nothing = {"status": "no verdict", "verdict": f"no verdict: {parts[0]['conjecture']}: {why}", "scope": why, "where": why}
    return {**parts[0], **nothing, "part": "survey", "rows": 0, "cases": 0, "nonzero": 0}


def document_of_record(data: object, *, file: str = "", made: str = "") -> dict[str, Any]:
    """The document of a record alone; one that cannot be read makes a document that says so and shows it."""
    try:
        found = contents(data)
    except RecordError as error:
        return unreadable(data, str(error), file=file, made=made)
    assert isinstance(data, dict), "what has contents is an object"
    known = found["counterexamples"]
    wrong_now = refuting(known, found["rule"], None)
    first = next((entry for entry, c in zip(data["counterexamples"], known, strict=True) if c in wrong_now), None)
    refuted = first is not None and data["status"] == "refuted"
    spaces = [_space(space) for space in _list(data.get("coverage"))]
    scope = scope_of_spaces(spaces) or "nothing is on record about what was compared"
    document = _empty(_text(data["conjecture"]), made) | {
        "file": file,
        "rule": _text(data.get("rule")),
        "status": "refuted" if refuted else "open",
        "verdict": f"refuted at {_text(first['where'])}, as it stands on record" if first and refuted else f"open: {scope}",
        "scope": scope,
        "about": _about(data | {"premise": data.get("premise") is True}),
        "notes": [
            "from the record alone: the rule was not asked again",
            *filter(None, [earlier_words([c for c in known if c not in wrong_now])]),
        ],
        "spaces": [*spaces, *(_space(sample) | {"drawn": True} for sample in _list(data.get("samples")))],
        "record": _record(data),
    }
    if first:
        document["failure"] = _failure(first | {"status": "refuted", "minimality": _minimal_on_record(first)})
        document["minimal"] = first.get("minimal") is True
    return document


def unreadable(data: object, problem: str, *, file: str = "", made: str = "", status: str = "unreadable") -> dict[str, Any]:
    """The document of something that cannot be used: what is wrong with it, and its source."""
    name = data.get("conjecture") if isinstance(data, dict) else None
    source = data if isinstance(data, str) else json.dumps(data, indent=2, ensure_ascii=False, default=str)
    return _empty(_text(name) or PurePath(file).stem or "no name", made) | {
        "file": file,
        "status": status,
        "verdict": f"{WORDS[status]}: {_text(problem)}",
        "scope": "nothing is known from it",
        "problem": _text(problem),
        "source": _text(source),
    }


def is_outcome(data: object) -> bool:
    """Whether something looks like the JSON form of an outcome."""
    return isinstance(data, dict) and data.get("format") != FORMAT and {"conjecture", "part", "status", "verdict"} <= set(data)


def scope_of_spaces(spaces: Iterable[Mapping[str, Any]]) -> str:
    """What was compared in order, in words; empty if nothing was.

    >>> scope_of_spaces([{"space": "Gr(1,2)", "seen": 4, "of": 4, "rows": 4, "cases": 4}])
    'all of Gr(1,2); 4 rows, 4 cases'
    """
    walked = [space for space in spaces if space.get("seen")]
    whole = [space for space in walked if space["seen"] == space["of"]]
    partly = [space for space in walked if space["seen"] != space["of"]]
    words = []
    if len(whole) == 1:
        words.append(f"all of {whole[0]['space']}")
    elif whole:
        words.append(f"all of {len(whole)} spaces, {whole[0]['space']} to {whole[-1]['space']}")
    words += [f"the first {space['seen']:,} of {space['of']:,} rows of {space['space']}" for space in partly[:2]]
    if len(partly) > 2:
        words.append(f"parts of {counted(len(partly) - 2, 'more space')}")
    if not words:
        return ""
    rows, cases, failing = (sum(space.get(key, 0) for space in walked) for key in ("rows", "cases", "failing"))
    fails = f"; it fails at {counted(failing, 'case')}" if failing else ""
    return f"{' and '.join(words)}; {counted(rows, 'row')}, {counted(cases, 'case')}{fails}"


def _empty(name: str, made: str) -> dict[str, Any]:
    return {
        "name": name,
        "file": "",
        "status": "no verdict",
        "verdict": "",
        "scope": "",
        "minimal": False,
        "about": _about(None),
        "notes": [],
        "rule": "",
        "parts": [],
        "spaces": [],
        "replay": "",
        "environment": "",
        "seed": "",
        "failure": None,
        "diagnosis": None,
        "record": None,
        "problem": "",
        "source": "",
        "made": made,
    }


def _about(data: object) -> dict[str, Any]:
    given = data if isinstance(data, Mapping) else {}
    choice = given.get("choice")
    return {
        **{key: _text(given.get(key)) for key in ("role", "ring", "family", "statement", "description")},
        "premise": given.get("premise") is True,
        "references": [_text(item) for item in _list(given.get("references"))],
        "contributors": [_text(item) for item in _list(given.get("contributors"))],
        "choice": {_text(key): _text(value) for key, value in choice.items()} if isinstance(choice, Mapping) else {},
    }


def _part(outcome: Mapping[str, Any]) -> dict[str, Any]:
    numbers = {key: _number(outcome.get(key)) for key in ("rows", "cases", "nonzero")}
    seconds = outcome.get("seconds")
    return {
        **{key: _text(outcome.get(key)) for key in ("part", "status", "scope", "seed")},
        **numbers,
        "seconds": float(seconds) if isinstance(seconds, (int, float)) else 0.0,
    }


def _space(data: object) -> dict[str, Any]:
    given = data if isinstance(data, Mapping) else {}
    words = {key: _text(given.get(key)) for key in ("how", "bound", "engine")}
    numbers = {key: _number(given.get(key)) for key in ("seen", "of", "rows", "cases", "nonzero", "failing")}
    flags = {key: given.get(key) is True for key in ("drawn", "out_of_reach")}
    return {"space": _text(given.get("space")), **words, **numbers, **flags}


def _failure(data: Mapping[str, Any]) -> dict[str, Any]:
    """The failure of an outcome, or a counterexample of a record."""
    products, layer = data.get("products"), data.get("layer")
    return {
        **{key: _text(data.get(key)) for key in ("where", "status", "detail", "trace", "remedy", "confirmed_by", "minimality")},
        "law": _text(data.get("broken_law")),
        "rule": _value(data.get("rule")),
        "oracle": _value(data.get("oracle")),
        "kinds": [_text(kind) for kind in _list(data.get("kinds"))],
        "objects": [_text(item) for item in _list(data.get("objects"))] if data.get("objects") is not None else None,
        "products": _products(products) if isinstance(products, Mapping) else None,
        "layer": _layer(layer) if isinstance(layer, Mapping) else None,
    }


def _products(data: Mapping[str, Any]) -> dict[str, Any]:
    return {"rule": _product(data.get("rule")), "oracle": _product(data.get("oracle")), "partial": data.get("partial") is True}


def _product(data: object) -> dict[str, Any] | None:
    if not isinstance(data, Mapping):
        return None
    terms = [
        {"w": _text(term.get("w")), "d": [_number(x) for x in _list(term.get("d"))], "n": _value(term.get("n"))}
        for term in _list(data.get("terms"))
        if isinstance(term, Mapping)
    ]
    return {"terms": terms, "more": _number(data.get("more"))}


def _layer(data: Mapping[str, Any]) -> dict[str, Any]:
    failures = [
        {"where": _text(item.get("where")), "rule": _value(item.get("rule")), "oracle": _value(item.get("oracle"))}
        for item in _list(data.get("failures"))
        if isinstance(item, Mapping)
    ]
    numbers = {key: _number(data.get(key)) for key in ("pairs", "cases", "orbits", "rows", "size")}
    return {**numbers, "complete": data.get("complete") is True, "all_orbits": data.get("all_orbits") is True, "failures": failures}


def _record(data: Mapping[str, Any]) -> dict[str, Any]:
    """What the page shows of a record beside the failure."""
    try:
        found = contents(data)
    except RecordError as error:
        return {"problem": str(error)}
    wrong_now = refuting(found["counterexamples"], found["rule"], None)
    known: list[dict[str, Any]] = [
        {key: _text(entry.get(key)) for key in ("where", "certificate", "instead")}
        | {"rule": _value(entry.get("rule")), "oracle": _value(entry.get("oracle")), "minimal": entry.get("minimal") is True}
        | {"earlier": counterexample not in wrong_now}
        for entry, counterexample in zip(data["counterexamples"], found["counterexamples"], strict=True)
    ]
    return {
        "problem": "",
        "status": _text(data["status"]),
        "rule": _text(data.get("rule")),
        "counterexamples": known,
        "spaces": [_space(space) for space in _list(data.get("coverage"))],
        "samples": [_space(sample) | {"seed": _text(sample.get("seed"))} for sample in _list(data.get("samples"))],
    }


def earlier_words(known: Sequence[Counterexample]) -> str:
    """What counterexamples to other versions of the rule say, in words; empty if there are none."""
    if not known:
        return ""
    who = "a version of the rule that the record does not name" if known[0].rule_hash is None else "an earlier version of the rule"
    more = f", and at {len(known) - 1} more" if len(known) > 1 else ""
    return f"{who} was refuted at {known[0].where}{more}"


def _minimal_on_record(entry: Mapping[str, Any]) -> str:
    return "minimal, as it stands on record" if entry.get("minimal") is True else "not known to be minimal"


def _text(value: object) -> str:
    """A text that can be shown, cut if it is longer than anybody reads; nothing for ``None``."""
    text = "" if value is None else value if isinstance(value, str) else str(value)
    return visible(text if len(text) <= _LONGEST else f"{text[:_LONGEST]} ... ({len(text) - _LONGEST:,} more characters)")


def visible(text: str) -> str:
    r"""A text whose invisible parts can be seen: control characters, marks that turn the direction of writing, halves of characters.

    >>> visible("a\u202eb\x07c")
    'a[U+202E]b[U+0007]c'
    """
    return _INVISIBLE.sub(lambda found: f"[U+{ord(found[0]):04X}]", text)


def _value(value: object) -> int | str | None:
    return value if value is None or (isinstance(value, int) and not isinstance(value, bool)) else _text(value)


def _number(value: object) -> int:
    return value if isinstance(value, int) and not isinstance(value, bool) else 0


def _list(value: object) -> list[Any]:
    return value[:_MOST] if isinstance(value, list) else []
