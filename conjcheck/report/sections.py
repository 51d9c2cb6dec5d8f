"""What the sections of a page show, as plain values: products term by term, failures by feature, the layer, the coverage."""

import re
from collections.abc import Mapping
from typing import Any

from conjcheck.errors import ConjcheckError
from conjcheck.geometry.case import Case, Row, parse_class
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.report.document import visible
from conjcheck.wording import counted

__all__ = ["cells", "diagnosis", "layer_words", "products"]

_MOST_TERMS = 24
_MOST_MAPPED = 120
_MOST_DEGREES = 9


def products(data: Mapping[str, Any], place: Case | Row | None) -> dict[str, Any]:
    """Both products, term by term: the terms that differ first, many equal ones folded away."""
    sides = {name: data[name] for name in ("rule", "oracle")}
    both = all(side is not None for side in sides.values())
    found: dict[tuple[tuple[int, ...], str], dict[str, Any]] = {}
    for name, side in sides.items():
        for term in side["terms"] if side else ():
            row = found.setdefault((tuple(term["d"]), term["w"]), {"d": term["d"], "w": term["w"], "rule": 0, "oracle": 0})
            row[name] = term["n"]
    rows = sorted(found.values(), key=lambda row: (sum(row["d"]), row["d"], _index(row["w"], place)))
    cut = any(side and side["more"] for side in sides.values())
    for row in rows:
        row["differs"] = both and row["rule"] != row["oracle"]
    if cut:  # what is missing on one side may only have been cut off
        shared = {key for key in found if all(any((tuple(t["d"]), t["w"]) == key for t in s["terms"]) for s in sides.values() if s)}
        rows = [row for row in rows if (tuple(row["d"]), row["w"]) in shared]
    differing = [row for row in rows if row["differs"]]
    equal = [row for row in rows if not row["differs"]]
    folds = len(rows) > _MOST_TERMS
    kept = equal[: max(0, _MOST_TERMS - len(differing))] if folds else equal
    more = " and ".join(f"{side['more']:,} by the {name}" for name, side in sides.items() if side and side["more"])
    return {
        "both": both,
        "has_rule": sides["rule"] is not None,
        "has_oracle": sides["oracle"] is not None,
        "partial": data["partial"],
        "differing": differing,
        "equal": equal,
        "shown": [*differing, *kept] if folds else rows,
        "folded": equal[len(kept) :],
        "more": f"Not all terms are here: {more} are left out, and so is what only one side shows." if more else "",
    }


def _index(text: str, place: Case | Row | None) -> tuple[int, str]:
    """The place of a class among the classes, as far as it is one."""
    try:
        return (parse_class(place.X, text).index, "") if place else (0, text)
    except ConjcheckError:
        return (0, text)


def diagnosis(data: object) -> dict[str, Any] | None:
    """Failures by feature, as far as an outcome carries them (``Diagnosis.as_json``)."""
    if not isinstance(data, Mapping):
        return None

    def texts(value: object) -> list[str]:
        return [visible(str(item)) for item in value] if isinstance(value, list) else []

    def number(entry: Mapping[str, Any], key: str) -> str:
        return f"{entry[key]:,}" if isinstance(entry.get(key), int) else "?"

    unit = "rows" if data.get("by_rows") is True else "cases"
    looked = f"{number(data, 'failing')} failing and {number(data, 'agreeing')} agreeing {unit}"
    where = visible(str(data.get("where", "")))
    words = [f"Looked at: {looked}{f' in {where}' if where else ''}.", *texts(data.get("signs")), *texts(data.get("unusable"))]
    firsts = data.get("firsts")
    conditions = data.get("conditions")
    suggestion = data.get("suggestion")
    return {
        "words": words,
        "unit": unit,
        "firsts": [(visible(str(k)), visible(str(v))) for k, v in firsts.items()] if isinstance(firsts, Mapping) else [],
        "conditions": [
            {
                "words": visible(str(entry.get("words", ""))),
                "expression": visible(str(entry.get("expression") or "")),
                **{key: number(entry, key) for key in ("failing", "agreeing", "informative")},
            }
            for entry in (conditions if isinstance(conditions, list) else [])
            if isinstance(entry, Mapping)
        ],
        "suggestion": {
            **{key: visible(str(suggestion.get(key) or "")) for key in ("words", "premise", "where")},
            **{key: number(suggestion, key) for key in ("cases", "informative", "fresh")},
        }
        if isinstance(suggestion, Mapping)
        else None,
    }


def layer_words(layer: Mapping[str, Any]) -> str:
    """All failures of the smallest failing space in one sentence."""
    pairs = counted(layer["pairs"], "ordered pair (u, v)", "ordered pairs (u, v)")
    cases = counted(layer["cases"], "failing case") if layer["cases"] else counted(layer["pairs"], "failing row")
    least = "" if layer["all_orbits"] else "at least "
    orbits = f"{least}{counted(layer['orbits'], 'orbit')} under the symmetries of the space"
    if layer["complete"]:
        return f"In the smallest failing space it fails at {pairs} of {layer['size']:,}: {cases} in {orbits}."
    looked = counted(layer["rows"], "row")
    return f"In the smallest failing space it fails at {pairs} at least: {cases} in {orbits}, among the {looked} looked at."


def cells(document: Mapping[str, Any], place: Case | Row | None) -> list[dict[str, str]]:
    """The coverage space by space: in each cell the space, what became of it, and how much was compared."""
    failing = place.X.name if place is not None and document["status"] != "agrees" else None
    found, named = [], set()
    for space in document["spaces"]:
        name, drawn = space["space"], space["drawn"]
        failed = name == failing and not drawn
        named.add(name)
        if drawn:
            rows = counted(space["rows"], "row") if space["rows"] else "rows drawn among these spaces"
            found.append({"kind": "drawn", "space": name, "state": "drawn at random", "count": rows, "degrees": ""})
        elif space["out_of_reach"]:
            out = "out of reach of the oracle"
            found.append({"kind": "out", "space": name, "state": "not compared", "count": out, "degrees": ""})
        else:
            whole = space["seen"] == space["of"]
            kind, state = ("whole", "agreed, complete") if whole else ("partly", "agreed, in part")
            if whole and not space["cases"]:
                state = "no case in the premise"
            if failed or space["failing"]:
                kind, state = "failed", "≠ fails here"
            of = counted(space["of"], "row")
            if not space["seen"] and kind == "partly":
                kind, state = "out", "not compared"
            count = f"all {of}" if whole else f"{space['seen']:,} of {of}"
            degrees = _degrees(document, name, whole=whole, failed=failed) if space["cases"] and len(found) < _MOST_MAPPED else ""
            found.append(
                {
                    "kind": kind,
                    "space": name,
                    "state": state,
                    "count": f"{count}, {counted(space['cases'], 'case')}",
                    "degrees": degrees,
                }
            )
    if failing is not None and failing not in named:
        first = "the first failure known"
        found.append({"kind": "failed", "space": failing, "state": "≠ fails here", "count": first, "degrees": ""})
    return found


def _degrees(document: Mapping[str, Any], name: str, *, whole: bool, failed: bool) -> str:
    """The total degrees |d| that cases of a space have, each with a sign: nothing fails, something does, or not compared to the end."""
    try:
        X = FlagVariety(name)
    except ConjcheckError:
        return ""
    most = 0 if document["about"]["ring"] in ("classical", "equivariant") else 2 * X.dim // min(X.q_degrees)
    layer = document["failure"] and document["failure"]["layer"]
    failures = layer["failures"] if failed and layer else []
    bad = {sum(map(int, d[1].split(","))) for item in failures if (d := re.search(r"q\^\(([\d,]{1,99})\)$", item["where"]))}
    rest = "=" if (layer["complete"] if failed and layer else whole and not failed) else "?"
    signs = [f"\N{NOT EQUAL TO}{k}" if k in bad else f"{rest}{k}" for k in range(min(most, _MOST_DEGREES) + 1)]
    return " ".join([*signs, "..."] if most > _MOST_DEGREES else signs)
