"""Names, classes and polynomials as LaTeX, from their plain text; no other LaTeX than that of ``amsmath`` is used."""

import re
import unicodedata
from collections.abc import Sequence

__all__ = ["latex_class", "latex_polynomial", "latex_power", "latex_space", "latex_text"]

_SPECIAL = {
    "\\": r"\textbackslash{}",
    "{": r"\{",
    "}": r"\}",
    "$": r"\$",
    "&": r"\&",
    "#": r"\#",
    "%": r"\%",
    "_": r"\_",
    "^": r"\textasciicircum{}",
    "~": r"\textasciitilde{}",
    "<": r"\textless{}",
    ">": r"\textgreater{}",
    "|": r"\textbar{}",
    '"': "''",
    "`": "'",
    "-": "-{}",
    "[": "{[}",
    "]": "{]}",
}
_ACCENTED = re.compile(r"[À-ÖÙ-Ýß-ïñ-öù-ýÿ]")


def latex_text(text: str) -> str:
    r"""Any text, escaped: control characters fall away, letters that a plain document cannot show are named by their code point.

    >>> latex_text("step_puzzles: 50 % of R&D")
    'step\\_puzzles: 50 \\% of R\\&D'
    """
    return "".join(_escaped(letter) for letter in text)


def _escaped(letter: str) -> str:
    if letter in "\n\r\t\x0b\x0c\u2028\u2029":
        return " "
    if letter.isascii():
        if unicodedata.category(letter) == "Cc":
            return ""
        return _SPECIAL.get(letter, letter)
    if unicodedata.category(letter) in ("Cf", "Cs", "Co", "Cn"):
        return ""
    return letter if _ACCENTED.fullmatch(letter) else f"{{[}}U+{ord(letter):04X}{{]}}"


def latex_space(name: str) -> str:
    r"""The name of a flag variety, for mathematics mode.

    >>> latex_space("Fl(1,3;4)"), latex_space("E6/P1"), latex_space("Q^5")
    ('\\mathrm{Fl}(1,3;4)', 'E_{6}/P_{1}', 'Q^{5}')
    """
    if found := re.fullmatch(r"([A-G])(\d+)/(?:P([\d,]+)|B)", name):
        return f"{found[1]}_{{{found[2]}}}/" + (f"P_{{{found[3]}}}" if found[3] else "B")
    if found := re.fullmatch(r"([A-Z])\^(\d+)", name):
        return f"{found[1]}^{{{found[2]}}}"
    if found := re.fullmatch(r"([A-Za-z]+)(\([\d,;]+\))", name):
        return f"\\mathrm{{{found[1]}}}{found[2]}"
    return f"\\text{{{latex_text(name)}}}"


def latex_class(text: str) -> str:
    r"""A class as it is printed, for mathematics mode: words in angle brackets, signs as bars.

    >>> latex_class("(2,1)"), latex_class("[2.-1.3]"), latex_class("<1.3.2>")
    ('(2,1)', '[2.\\bar{1}.3]', '\\langle 1.3.2\\rangle')
    """
    if re.fullmatch(r"\([\d,]*\)|\[[\d.]+\]", text):
        return text
    if re.fullmatch(r"\[[-\d.]+\]", text):
        return re.sub(r"-(\d+)", r"\\bar{\1}", text)
    if found := re.fullmatch(r"<([\d.]*)>", text):
        return f"\\langle {found[1]}\\rangle"
    return f"\\text{{{latex_text(text)}}}"


def latex_power(degree: Sequence[int]) -> str:
    """The power ``q^d`` in mathematics mode, empty for degree 0."""
    return f"q^{{({','.join(map(str, degree))})}}" if any(degree) else ""


def latex_polynomial(text: str) -> str:
    r"""A polynomial in the simple roots as it is printed, for mathematics mode.

    >>> latex_polynomial("alpha1^2 + 2 alpha1 alpha12")
    '\\alpha_{1}^{2} + 2 \\alpha_{1} \\alpha_{12}'
    """
    if not re.fullmatch(r"(?:alpha\d+|\^\d+|\d+|[-+() ])*", text):
        return f"\\text{{{latex_text(text)}}}"
    return re.sub(r"\^(\d+)", r"^{\1}", re.sub(r"alpha(\d+)", r"\\alpha_{\1}", text))
