"""The quantum Bruhat graph between two nodes: exactly the ways that there are."""

from itertools import pairwise
from xml.etree import ElementTree as ET

import networkx as nx
import pytest

from conjcheck import Fl, Gr, constant
from conjcheck.evidence.derivation import derivation
from conjcheck.geometry.case import Case
from conjcheck.report.paths import interval, level, picture_of_paths


def ends(case):
    """The two nodes of a case."""
    return (case.u.index, (0,) * len(case.d)), (case.w.index, case.d)


def test_classical_interval_on_fl3():
    """From the identity to the longest element of Fl(3) lead all six classes, and the eight covers of the Bruhat order."""
    X = Fl(3)
    graph = interval(X, (0, (0, 0)), (5, (0, 0)))
    assert (len(graph), graph.number_of_edges()) == (6, 8)
    assert not any(q for _, _, q in graph.edges(data="q"))


def test_edges_go_one_level_up():
    """Every edge raises the level by 1, quantum ones too, and every node lies on a way from u to q^d w."""
    X = Gr(2, 4)
    start, goal = (X.schubert(partition=(2, 1)).index, (0,)), (X.schubert(partition=(1,)).index, (1,))
    graph = interval(X, start, goal)
    assert all(level(X, b) == level(X, a) + 1 for a, b in graph.edges)
    assert any(q for _, _, q in graph.edges(data="q"))
    for node in graph:
        assert nx.has_path(graph, start, node)
        assert nx.has_path(graph, node, goal)


def test_no_way_means_zero():
    """Where no way leads, the picture is empty, the sentence says that the constant is 0, and it is."""
    X = Fl(3)
    u, w = X.schubert(permutation=(2, 1, 3)), X.schubert(permutation=(1, 3, 2))
    svg, text = picture_of_paths(X, (u.index, (0, 0)), (w.index, (0, 0)), [], "g")
    assert svg == ""
    assert "the constant is 0" in text
    assert constant(u, X.identity, w) == 0


@pytest.mark.parametrize("text", ["Gr(2,4): (2,1) * (2,1) -> (2), q^(1)", "Fl(4): [2143] * [2143] -> [3241], q^(0,0,0)"])
def test_what_a_derivation_uses_is_thick(text):
    """The edges of a derivation are edges of the graph, are drawn as used, and are counted in the words."""
    case = Case.parse(text)
    chain = derivation(case)
    X = chain.space
    nodes = sorted({node for edge in chain.edges for node in edge}, key=lambda node: level(X, node))
    svg, words = picture_of_paths(X, nodes[0], nodes[-1], chain.edges, "g")
    drawn = [e for e in ET.fromstring(svg).iter() if "used" in (e.get("class") or "").split()]
    assert len(drawn) == len(chain.edges) > 0
    assert f"{len(drawn)} used in the derivation" in words


def test_too_many_nodes_are_not_drawn():
    """The whole of Fl(5) is not drawn, but a way through it that a derivation uses is."""
    X = Fl(5)
    start, goal = (0, (0,) * 4), (X.point.index, (0,) * 4)
    assert picture_of_paths(X, start, goal, [], "g")[0] == ""
    graph = interval(X, start, goal)
    way = nx.shortest_path(graph, start, goal)
    svg, text = picture_of_paths(X, start, goal, list(pairwise(way)), "g")
    assert f"Of {len(graph)} nodes only those of the derivation are drawn" in text
    assert sum("node" in (e.get("class") or "") for e in ET.fromstring(svg).iter()) == len(way)


def test_nodes_do_not_overlap():
    """Nodes of one level stand apart."""
    case = Case.parse("Fl(1,2,3;5): [14325] * [21534] -> [34512], q^(0,0,0)")
    svg, _ = picture_of_paths(case.X, *ends(case), [], "g")
    boxes = [e for e in ET.fromstring(svg) if "node" in (e.get("class") or "").split()]
    assert len(boxes) == 7
    for level_ in {e.get("y") for e in boxes}:
        row = sorted((float(e.get("x")), float(e.get("width"))) for e in boxes if e.get("y") == level_)
        assert all(x + width < y for (x, width), (y, _) in pairwise(row))


def test_one_and_the_same_class():
    """From a class to itself there is nothing to draw."""
    assert picture_of_paths(Fl(3), (0, (0, 0)), (0, (0, 0)), [], "g") == ("", "u and w are the same class.")
