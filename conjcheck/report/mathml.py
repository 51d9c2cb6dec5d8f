"""LaTeX as MathML, without network and without fonts of our own; whatever cannot be converted well is left as its source."""

from functools import lru_cache
from html import unescape
from unicodedata import bidirectional
from xml.etree import ElementTree as ET

__all__ = ["mathml"]

_LONGEST = 3_000
_DEEPEST = 60
_TAGS = {
    *("math", "mrow", "mi", "mn", "mo", "mtext", "mspace", "mstyle", "msup", "msub", "msubsup", "munder", "mover", "munderover"),
    *("mfrac", "msqrt", "mroot", "mtable", "mtr", "mtd", "mpadded", "mphantom", "mmultiscripts", "mprescripts"),
}
_ATTRIBUTES = {
    *("stretchy", "fence", "form", "columnalign", "columnspacing", "rowspacing", "width", "displaystyle", "scriptlevel", "lspace"),
    *("rspace", "movablelimits", "accent", "accentunder", "linethickness", "mathvariant", "minsize", "maxsize", "separator"),
}
_CALM = set("abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789.-+% ")


@lru_cache(maxsize=256)
def mathml(latex: str) -> str | None:
    r"""A ``<math>`` element for a formula; ``None`` if it is not understood: then show the source.

    Only known elements and attributes without any markup of their own come through, and every text is escaped.

    >>> mathml(r"\alpha_1")
    '<math xmlns="http://www.w3.org/1998/Math/MathML" display="block"><mrow><msub><mi>α</mi><mn>1</mn></msub></mrow></math>'
    >>> mathml(r"\frac{") is None
    True
    """
    formula = " ".join(latex.split())
    if len(formula) > 2 and formula.startswith("$") and formula.endswith("$"):
        formula = formula.strip("$")
    if not formula or len(formula) > _LONGEST or not formula.isprintable() or any(map(_runs_left, formula)):
        return None
    from latex2mathml.converter import convert_to_element

    try:
        made = _clean(convert_to_element(formula), 0)
        made.set("xmlns", "http://www.w3.org/1998/Math/MathML")
        made.set("display", "block")
        return ET.tostring(made, encoding="unicode")
    except Exception:  # whatever the converter says of bad LaTeX
        return None


def _runs_left(letter: str) -> bool:
    return bidirectional(letter) in ("R", "AL", "AN")


def _clean(element: ET.Element, depth: int) -> ET.Element:
    """A copy with nothing in it but formulas.

    Raises:
        ValueError: a command that was not understood, or an element that is no formula.
    """
    text = unescape(element.text or "")
    if element.tag not in _TAGS or depth > _DEEPEST or (element.tag == "mi" and text.startswith("\\") and len(text) > 1):
        raise ValueError("expected a formula that can be converted")
    kept = {key: value for key, value in element.attrib.items() if key in _ATTRIBUTES and set(value) <= _CALM}
    made = ET.Element(element.tag, kept)
    made.text = text
    made.extend(_clean(child, depth + 1) for child in element)
    return made
