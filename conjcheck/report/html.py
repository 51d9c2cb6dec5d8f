"""The page of one conjecture: one file that loads nothing, verdict first; made from the plain document of ``report.document``.

Nothing in a document is trusted: texts are escaped and isolated, pictures and formulas are built from what was parsed, and a content
security policy forbids everything but the style (and on the board the script) whose hash it states.
"""

import base64
import hashlib
from collections.abc import Callable, Mapping, Sequence
from functools import cache
from importlib.resources import files
from pathlib import PurePosixPath, PureWindowsPath
from typing import Any

from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup, escape

from conjcheck.errors import ConjcheckError
from conjcheck.evidence.derivation import derivation
from conjcheck.evidence.entries import own_version
from conjcheck.evidence.record import parse_place
from conjcheck.geometry.case import Case, Row
from conjcheck.geometry.flag_variety import SchubertClass
from conjcheck.report.document import WORDS, scope_of_spaces, visible
from conjcheck.report.latex import latex_snippet
from conjcheck.report.mathml import mathml
from conjcheck.report.paths import Edge, level, picture_of_paths
from conjcheck.report.pictures import pictures_of
from conjcheck.report.sections import cells, diagnosis, layer_words, products

__all__ = ["SIGNS", "page", "rendered"]

SIGNS = {"agrees": "=", "refuted": "≠", "open": "…", "unreadable": "?", "broken": "?"}
"""A sign for a status, so that colour alone says nothing; ``!`` for every other one."""

_LONGEST_PLACE = 600


def page(document: Mapping[str, Any]) -> str:
    """The page of a document, as the text of an HTML file.

    Cost: well under a second; pictures of classes of a large variety need its classes enumerated once.
    """
    failure = document["failure"]
    place = _place(failure["where"]) if failure else None
    classes = _classes(place)
    record = document["record"]
    view = {
        **document,
        "word": WORDS.get(document["status"], document["status"]),
        "sign": SIGNS.get(document["status"], "!"),
        "against": document["status"] not in ("agrees", "open"),
        "math": _markup(mathml(document["about"]["statement"])),
        "facts": _facts(document["about"]),
        "file": _short(document["file"]),
        "failure_title": "Counterexample" if failure and failure["status"] == "refuted" else "Where it went wrong",
        "classes": classes,
        "notations": _notations([u for _, u in classes]),
        "products": products(failure["products"], place) if failure and failure["products"] else None,
        "pictures": _pictures(classes),
        "paths": _paths(place, document["about"]["ring"]),
        "diagnosis": diagnosis(document["diagnosis"]),
        "layer_prefix": f"{place.X}: " if place is not None else "\n",
        "layer_words": layer_words(failure["layer"]) if failure and failure["layer"] else "",
        "layer_values": bool(failure and failure["layer"] and any(f["rule"] is not None for f in failure["layer"]["failures"])),
        "cells": cells(document, place),
        "record": record and record | {"scope": scope_of_spaces(record.get("spaces", [])), "stale": record.get("stale", "")},
        "latex": latex_snippet(document),
    }
    return rendered("page.html", view | {"sections": _sections(view)})


def rendered(template: str, view: Mapping[str, Any], *, script: str = "") -> str:
    """A template of ours, filled, with the style and the policy that allows this style and this script and nothing else."""
    style = _asset("look.css")
    policy = (
        f"default-src 'none'; style-src '{_hash(style)}'; script-src {_quoted(script)}; base-uri 'none'; form-action 'none'; "
        "connect-src 'none'"
    )
    # The style and the script are files of ours: they hold no "</".
    return (
        _templates()
        .get_template(template)
        .render(
            {**view, "style": Markup(style), "script": Markup(script), "policy": policy, "version": own_version()}  # noqa: S704
        )
    )


@cache
def _templates() -> Environment:
    made = Environment(
        loader=PackageLoader("conjcheck.report", "."),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    made.filters["breakable"] = _breakable
    return made


def _breakable(text: str) -> Markup:
    """A name, escaped, that may be broken after an underscore."""
    return escape(text).replace("_", Markup("_<wbr>"))


@cache
def _asset(name: str) -> str:
    text = files("conjcheck.report").joinpath(name).read_text(encoding="utf-8")
    assert "</" not in text, "it stands inside an element"
    return text


def _hash(text: str) -> str:
    return "sha256-" + base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()


def _quoted(script: str) -> str:
    return f"'{_hash(script)}'" if script else "'none'"


def _markup(text: str | None) -> Markup | None:
    """Markup made by ``ElementTree`` from elements of ours, every text escaped."""
    return None if text is None else Markup(text)  # noqa: S704


def _place(where: str) -> Case | Row | None:
    """The case or row of a text; ``None`` if it is none, or none that can be enumerated."""
    if len(where) > _LONGEST_PLACE:
        return None
    try:
        return parse_place(where)
    except ConjcheckError:
        return None


def _classes(place: Case | Row | None) -> list[tuple[str, SchubertClass]]:
    if place is None:
        return []
    return [(letter, getattr(place, letter)) for letter in (("u", "v", "w") if isinstance(place, Case) else ("u", "v"))]


def _facts(about: Mapping[str, Any]) -> list[str]:
    """What kind of conjecture it is, in a few words each."""
    ring, family = about["ring"], about["family"]
    words = [
        about["role"],
        f"{ring} ring" if ring else "",
        f"on {family}" if family else "",
        "with a premise" if about["premise"] else "",
    ]
    return [word for word in words if word] + [f"{key} = {value}" for key, value in about["choice"].items()]


def _short(file: str) -> str:
    """The last two parts of a path: the rest is about somebody's machine."""
    parts = PureWindowsPath(file).parts if "\\" in file else PurePosixPath(file).parts
    return "/".join(part.strip("/\\") for part in parts[-2:])


def _notations(classes: list[SchubertClass]) -> list[tuple[str, list[str]]]:
    """The rows of the table of notations."""
    if not classes:
        return []
    show: dict[str, Callable[[SchubertClass], str]] = {
        "permutation": lambda u: " ".join(map(str, u.permutation)),
        "signed": lambda u: " ".join(map(str, u.signed)),
        "partition": lambda u: f"({','.join(map(str, u.partition))})",
        "string": lambda u: u.string,
        "word": lambda u: " ".join(map(str, u.word)) or "empty",
    }
    rows = [(name, [show[name](u) for u in classes]) for name in classes[0].variety.notations]
    rows.append(("length", [str(u.length) for u in classes]))
    rows.append(("descents", [", ".join(map(str, u.descents)) or "none" for u in classes]))
    return [*rows, ("dual", [str(u.dual) for u in classes])]


def _pictures(classes: list[tuple[str, SchubertClass]]) -> list[tuple[str, str, list[Markup]]]:
    found = [
        (letter, str(u), [m for svg in pictures_of(u, letter, f"picture-{letter}") if (m := _markup(svg))]) for letter, u in classes
    ]
    return [entry for entry in found if entry[2]]


def _paths(place: Case | Row | None, ring: str) -> dict[str, Any]:
    """The graph between u and w, with the edges that a derivation uses, and its lines."""
    found: dict[str, Any] = {"svg": None, "text": "", "lines": [], "complete": False, "problem": ""}
    if not isinstance(place, Case):
        return found
    X, start, goal = place.X, (place.u.index, (0,) * len(place.d)), (place.w.index, place.d)
    used: Sequence[Edge] = ()
    if not ring.startswith("equivariant"):
        try:
            chain = derivation(place)
        except ConjcheckError as error:
            found["problem"] = visible(str(error))
        else:
            found["lines"], found["complete"] = list(chain.lines), chain.complete
            if chain.edges:  # the derivation may multiply v instead of u, and may run on the complete flag variety
                X, used = chain.space, chain.edges
                nodes = sorted({node for edge in used for node in edge}, key=lambda node: level(X, node))
                start, goal = nodes[0], nodes[-1]
    svg, found["text"] = picture_of_paths(X, start, goal, used, "graph")
    return found | {"svg": _markup(svg) if svg else None}


def _sections(view: Mapping[str, Any]) -> list[tuple[str, str]]:
    """The sections that the page has, for its list of contents."""
    about, failure = view["about"], view["failure"]
    there = [
        ("verdict", "Verdict", True),
        ("source", "What is there", view["source"]),
        ("statement", "Statement", any(about[key] for key in ("statement", "description", "references", "contributors"))),
        ("failure", view["failure_title"], failure),
        ("pictures", "Pictures", view["pictures"]),
        ("paths", "Quantum Bruhat graph", view["paths"]["text"]),
        ("diagnosis", "Failures by feature", view["diagnosis"]),
        ("layer", "All failures there", failure and failure["layer"]),
        ("coverage", "What was compared", view["cells"] or view["parts"]),
        ("record", "On record", view["record"]),
        ("replay", "To repeat it", view["replay"] or view["environment"] or view["file"]),
        ("latex", "For a paper", view["latex"]),
    ]
    return [(key, title) for key, title, present in there if present]
