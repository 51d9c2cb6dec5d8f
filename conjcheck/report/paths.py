"""The part of the quantum Bruhat graph between two nodes as a picture: every way up by Chevalley terms, in levels by length.

A node is a class x with a power of q, at level ``l(x) + sum d_i deg q_i``; an edge is a term of the quantum Chevalley formula. The
constant of a case counts, with signs and sizes, ways from u to ``q^d w``: where there is none it is 0.
"""

from collections.abc import Collection
from xml.etree import ElementTree as ET

import networkx as nx

from conjcheck.errors import OutOfReach
from conjcheck.geometry.flag_variety import Degree, FlagVariety
from conjcheck.oracle.chevalley import chevalley
from conjcheck.report.pictures import drawing, shape, words

__all__ = ["Edge", "Node", "interval", "level", "picture_of_paths"]

Node = tuple[int, Degree]
"""A class, by its 0-based index, and a power of q."""

Edge = tuple[Node, Node]

_MOST_CLASSES = 6_000
_MOST_VISITED = 4_000
_MOST_NODES = 60
_LEVEL = 58
_LETTER = 7.2


def interval(X: FlagVariety, start: Node, goal: Node) -> "nx.DiGraph | None":
    """All ways by Chevalley terms from one node to another; ``None`` if they are too many to be looked at, empty if there is none.

    Every edge has the attribute ``q``, whether its term is a quantum one; every node has ``level``.
    """
    if X.number_of_classes > _MOST_CLASSES:
        return None
    terms, top = chevalley(X), level(X, goal)
    whole = nx.DiGraph()
    whole.add_nodes_from((start, goal))
    waiting = [start]
    while waiting:
        u, e = node = waiting.pop()
        for target, power, _ in terms.terms(u):
            degree = tuple(a + b for a, b in zip(e, power, strict=True))
            other = target, degree
            if any(a > b for a, b in zip(degree, goal[1], strict=True)) or level(X, other) > top:
                continue
            if other not in whole:
                waiting.append(other)
            whole.add_edge(node, other, q=any(power))
        if len(whole) > _MOST_VISITED:
            return None
    kept = nx.ancestors(whole, goal) & nx.descendants(whole, start) | {start, goal}
    part = whole.subgraph(kept).copy() if start == goal or nx.has_path(whole, start, goal) else nx.DiGraph()
    for node in part:
        part.nodes[node]["level"] = level(X, node)
    return part


def level(X: FlagVariety, node: Node) -> int:
    """The length of a class plus the degree of its power of q."""
    return X.classes[node[0]].length + sum(a * b for a, b in zip(node[1], X.q_degrees, strict=True))


def picture_of_paths(X: FlagVariety, start: Node, goal: Node, used: Collection[Edge], key: str) -> tuple[str, str]:
    """The picture and a sentence about it; the picture is empty where there is nothing to draw, or too much.

    Args:
        X: the variety.
        start, goal: from where to where.
        used: edges to be drawn strongly, e.g. those that a derivation uses; edges that are no Chevalley terms are left out.
        key: an identifier that no other picture of the page has.
    """
    ends = f"{_label(X, start)} and {_label(X, goal)} on {X}"
    if start == goal:
        return "", "u and w are the same class."
    try:
        graph = interval(X, start, goal)
    except OutOfReach as error:
        return "", f"The quantum Bruhat graph is not drawn: {error}."
    if graph is None:
        return "", f"The part of the quantum Bruhat graph between {ends} is too large to be drawn."
    if not graph:
        return "", f"No way leads between {ends} in the quantum Bruhat graph: the constant is 0."
    note = ""
    if len(graph) > _MOST_NODES:
        strong = [edge for edge in used if graph.has_edge(*edge)]
        if not strong or len({node for edge in strong for node in edge}) > _MOST_NODES:
            return "", f"The part of the quantum Bruhat graph between {ends} has {len(graph):,} nodes: too many to be drawn."
        note = f" Of {len(graph):,} nodes only those of the derivation are drawn."
        graph = graph.edge_subgraph(strong).copy()
    highlighted = {edge for edge in used if graph.has_edge(*edge)}
    edges, quantum = graph.number_of_edges(), sum(q for _, _, q in graph.edges(data="q"))
    text = (
        f"{len(graph):,} nodes and {edges:,} {'edge' if edges == 1 else 'edges'} between {ends}"
        + (f", {quantum:,} of the edges quantum (dashed)" if quantum else "")
        + (f", {len(highlighted):,} used in the derivation (thick)" if highlighted else "")
        + f".{note}"
    )
    return ET.tostring(_drawn(X, graph, (start, goal), highlighted, key, text), encoding="unicode"), text


def _label(X: FlagVariety, node: Node) -> str:
    u, e = node
    power = f"q^({','.join(map(str, e))}) " if any(e) else ""
    return f"{power}{X.classes[u]}"


def _drawn(X: FlagVariety, graph: "nx.DiGraph", ends: tuple[Node, Node], highlighted: set[Edge], key: str, text: str) -> ET.Element:
    labels = {node: _label(X, node) for node in graph}
    room = max(len(label) for label in labels.values()) * _LETTER + 22
    places = _places(graph)
    width = (max(x for x, _ in places.values()) + 1) * room + 8
    high = max(y for _, y in places.values())
    title = f"quantum Bruhat graph from {_label(X, ends[0])} to {_label(X, ends[1])}"
    svg = drawing(width, (high + 1) * _LEVEL, key, title, text)
    svg.set("class", "picture graph")
    centre = {node: (4 + (x + 0.5) * room, (high - y + 0.5) * _LEVEL) for node, (x, y) in places.items()}
    for a, b, q in sorted(graph.edges(data="q"), key=lambda edge: edge[:2] in highlighted):
        cls = "edge" + (" quantum" if q else "") + (" used" if (a, b) in highlighted else "")
        (x1, y1), (x2, y2) = centre[a], centre[b]
        shape(svg, "line", cls, x1=x1, y1=y1 - 10, x2=x2, y2=y2 + 10)
    for node, (x, y) in centre.items():
        wide = len(labels[node]) * _LETTER + 10
        shape(svg, "rect", "node end" if node in ends else "node", x=x - wide / 2, y=y - 11, width=wide, height=22, rx=4.0)
        words(svg, x, y, labels[node])
    return svg


def _places(graph: "nx.DiGraph") -> dict[Node, tuple[float, int]]:
    """Columns and levels: levels centred, and inside a level each node near the middle of its neighbours below, then above."""
    lowest = min(high for _, high in graph.nodes(data="level"))
    levels: dict[int, list[Node]] = {}
    for node, high in sorted(graph.nodes(data="level"), key=lambda item: (item[1], item[0])):
        levels.setdefault(high - lowest, []).append(node)
    order = sorted(levels)
    spot: dict[Node, float] = {}
    for sweep in range(6):
        for y in order if sweep % 2 == 0 else reversed(order):
            near = graph.pred if sweep % 2 == 0 else graph.succ
            row = levels[y]
            middle = {node: [spot[other] for other in near[node] if other in spot] for node in row}
            row.sort(key=lambda node, m=middle: (sum(m[node]) / len(m[node]) if m[node] else spot.get(node, 0.0), node))  # type: ignore[misc]
            for k, node in enumerate(row):
                spot[node] = k - (len(row) - 1) / 2
    left = min(spot.values())
    return {node: (x - left, order.index(graph.nodes[node]["level"] - lowest)) for node, x in spot.items()}
