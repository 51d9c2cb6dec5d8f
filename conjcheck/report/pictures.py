"""Pictures of Schubert classes as SVG: Young diagrams, shifted diagrams, strings, Rothe diagrams, heaps of reduced words.

Every picture carries a title and a description in words. Colours, line widths and letters are left to the style sheet of the page,
through the classes ``box``, ``empty``, ``line``, ``dot``, ``bead``, ``small``.
"""

from xml.etree import ElementTree as ET

import networkx as nx

from conjcheck.geometry.cartan import cartan_matrix
from conjcheck.geometry.flag_variety import SchubertClass
from conjcheck.geometry.notation import LETTERS

__all__ = ["drawing", "pictures_of", "shape", "words"]

_UNIT = 22
_MARGIN = 6
_MOST_ACROSS = 40
_MOST_LETTERS = 60


def drawing(width: float, height: float, key: str, title: str, description: str, *, role: str = "img") -> ET.Element:
    """An empty picture with its words; ``key`` is an identifier that no other picture of the page has."""
    svg = ET.Element(
        "svg",
        {
            "class": "picture",
            "role": role,
            "aria-labelledby": f"{key}-title",
            "aria-describedby": f"{key}-words",
            "viewBox": f"0 0 {width:g} {height:g}",
            "width": f"{width:g}",
            "height": f"{height:g}",
        },
    )
    ET.SubElement(svg, "title", {"id": f"{key}-title"}).text = title
    ET.SubElement(svg, "desc", {"id": f"{key}-words"}).text = description
    return svg


def shape(svg: ET.Element, tag: str, cls: str, **numbers: float | str) -> ET.Element:
    """One shape in a picture."""
    given = {key: value if isinstance(value, str) else f"{value:g}" for key, value in numbers.items()}
    return ET.SubElement(svg, tag, {"class": cls, **given})


def words(svg: ET.Element, x: float, y: float, text: str, cls: str = "small") -> None:
    """Text in a picture, centred at a point."""
    made = shape(svg, "text", cls, x=x, y=y)
    made.set("text-anchor", "middle")
    made.set("dominant-baseline", "central")
    made.text = text


def pictures_of(u: SchubertClass, name: str, key: str) -> list[str]:
    """The pictures of a class, each one ``<svg>`` element; none where they would be too large to be read.

    Args:
        u: the class.
        name: what it is called on the page, e.g. ``"u"``.
        key: an identifier that no other class on the page has.
    """
    X, found = u.variety, []
    if X.n > _MOST_ACROSS:
        return []
    if X.is_grassmannian:
        found.append(_young(u, name, f"{key}-young"))
    elif X.is_maximal_isotropic:
        found.append(_shifted(u, name, f"{key}-shifted"))
    elif X.kind.letter == "A":
        found.append(_rothe(u, name, f"{key}-rothe"))
    elif len(u.word) <= _MOST_LETTERS:
        found.append(_heap(u, name, f"{key}-heap"))
    if X.kind.letter == "A" and not X.is_complete:
        found.append(_string(u, name, f"{key}-string"))
    return [ET.tostring(svg, encoding="unicode") for svg in found]


def _cells(svg: ET.Element, cells: list[tuple[int, int]], cls: str) -> None:
    """Unit boxes at (row, column), 0-based."""
    for row, column in cells:
        shape(svg, "rect", cls, x=_MARGIN + column * _UNIT, y=_MARGIN + row * _UNIT, width=_UNIT, height=_UNIT)


def _rows(partition: tuple[int, ...]) -> str:
    if not partition:
        return "no box"
    return (
        f"{'row' if len(partition) == 1 else 'rows'} of {', '.join(map(str, partition))} {'box' if partition == (1,) else 'boxes'}"
    )


def _young(u: SchubertClass, name: str, key: str) -> ET.Element:
    k, columns, shown = u.variety.marked[0], u.variety.n - u.variety.marked[0], u.partition
    text = f"{_rows(shown)}, inside {k} rows and {columns} columns"
    svg = drawing(columns * _UNIT + 2 * _MARGIN, k * _UNIT + 2 * _MARGIN, key, f"Young diagram of {name} = {u}", text)
    _cells(svg, [(i, j) for i in range(k) for j in range(columns)], "empty")
    _cells(svg, [(i, j) for i, part in enumerate(shown) for j in range(part)], "box")
    return svg


def _shifted(u: SchubertClass, name: str, key: str) -> ET.Element:
    X, shown = u.variety, u.partition
    largest = X.rank - 1 if X.kind.letter == "D" else X.rank
    text = f"{_rows(shown)}, each row one box further to the right, inside the staircase of {largest} rows"
    size = largest * _UNIT + 2 * _MARGIN
    svg = drawing(size, size, key, f"shifted diagram of {name} = {u}", text)
    _cells(svg, [(i, j) for i in range(largest) for j in range(i, largest)], "empty")
    _cells(svg, [(i, i + j) for i, part in enumerate(shown) for j in range(part)], "box")
    return svg


def _rothe(u: SchubertClass, name: str, key: str) -> ET.Element:
    w, n = u.permutation, u.variety.n
    boxes = [(i, j - 1) for i in range(n) for j in range(1, w[i]) if j in w[i + 1 :]]
    placed = ", ".join(f"({i + 1},{j + 1})" for i, j in boxes) or "none"
    text = f"dots in row i and column w(i), for w = {' '.join(map(str, w))}; boxes (row, column): {placed}"
    size = n * _UNIT + 2 * _MARGIN
    svg = drawing(size, size, key, f"Rothe diagram of {name} = {u}", text)
    shape(svg, "rect", "frame", x=_MARGIN, y=_MARGIN, width=n * _UNIT, height=n * _UNIT)
    _cells(svg, boxes, "box")
    for i, value in enumerate(w):
        x, y = _MARGIN + (value - 0.5) * _UNIT, _MARGIN + (i + 0.5) * _UNIT
        shape(svg, "polyline", "hook", points=f"{_MARGIN + n * _UNIT},{y:g} {x:g},{y:g} {x:g},{_MARGIN + n * _UNIT}")
        shape(svg, "circle", "dot", cx=x, cy=y, r=3.2)
    return svg


def _string(u: SchubertClass, name: str, key: str) -> ET.Element:
    letters, steps = [LETTERS.index(letter) for letter in u.string], len(u.variety.marked)
    height = 2 * _MARGIN + _UNIT + steps * _UNIT * 0.6
    svg = drawing(
        len(letters) * _UNIT + 2 * _MARGIN,
        height,
        key,
        f"string of {name} = {u}",
        f"the letters {' '.join(u.string)}, one per value",
    )
    centres = [
        (_MARGIN + (place + 0.5) * _UNIT, height - _MARGIN - _UNIT / 2 - letter * _UNIT * 0.6)
        for place, letter in enumerate(letters)
    ]
    shape(svg, "polyline", "line", points=" ".join(f"{x:g},{y:g}" for x, y in centres))
    for (x, y), letter in zip(centres, letters, strict=True):
        shape(svg, "circle", "bead", cx=x, cy=y, r=_UNIT * 0.42)
        words(svg, x, y, LETTERS[letter])
    return svg


def _heap(u: SchubertClass, name: str, key: str) -> ET.Element:
    """The heap of a reduced word: a piece stands on the earlier ones that it does not commute with; the last letter is the lowest."""
    X, word = u.variety, u.word
    matrix = cartan_matrix(X.kind)
    pieces: list[tuple[int, int]] = []
    rests: nx.DiGraph[tuple[int, int]] = nx.DiGraph()
    for letter in reversed(word):
        below = [piece for piece in pieces if matrix[piece[0] - 1][letter - 1]]
        pieces.append((letter, max((level for _, level in below), default=-1) + 1))
        rests.add_edges_from((pieces[-1], piece) for piece in below)
    high = max((level for _, level in pieces), default=-1) + 1
    across = _columns(X.kind.letter, X.rank)
    width = (max(across.values()) + 1) * _UNIT + 2 * _MARGIN
    height = max(high, 1) * _UNIT * 1.1 + 2 * _MARGIN + _UNIT
    text = (
        f"the reduced word {' '.join(map(str, word)) or '(empty)'}, its last letter lowest; letters that commute stand side by side"
    )
    svg = drawing(width, height, key, f"heap of {name} = {u}", text)

    def centre(piece: tuple[int, int]) -> tuple[float, float]:
        return _MARGIN + (across[piece[0]] + 0.5) * _UNIT, height - _MARGIN - _UNIT - (piece[1] + 0.5) * _UNIT * 1.1

    floor = height - _MARGIN - _UNIT * 0.9
    shape(svg, "line", "line", x1=_MARGIN, x2=width - _MARGIN, y1=floor, y2=floor)
    for node, column in across.items():
        words(svg, _MARGIN + (column + 0.5) * _UNIT, height - _MARGIN - _UNIT * 0.35, str(node), "node")
    for upper, lower in sorted(nx.transitive_reduction(rests).edges):
        (x1, y1), (x2, y2) = centre(upper), centre(lower)
        shape(svg, "line", "line", x1=x1, y1=y1, x2=x2, y2=y2)
    for piece in pieces:
        x, y = centre(piece)
        shape(svg, "circle", "bead", cx=x, cy=y, r=_UNIT * 0.42)
        words(svg, x, y, str(piece[0]))
    return svg


def _columns(letter: str, rank: int) -> dict[int, int]:
    """The column of each node of the Dynkin diagram, from the left; in type E the short branch stands beside the node it hangs on."""
    order = [1, 3, 4, 2, *range(5, rank + 1)] if letter == "E" else range(1, rank + 1)
    return {node: column for column, node in enumerate(order)}
