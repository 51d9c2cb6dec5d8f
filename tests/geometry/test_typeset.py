"""Names, classes and polynomials as LaTeX: nothing in them is left to chance."""

import re

import pytest

from conjcheck import IG, LG, OG, Fl, FlagVariety, Gr, product, simple_roots
from conjcheck.geometry.families import HomogeneousSpaces
from conjcheck.geometry.typeset import latex_class, latex_polynomial, latex_power, latex_space, latex_text


@pytest.mark.parametrize(
    ("name", "latex"),
    [
        ("Gr(2,4)", r"\mathrm{Gr}(2,4)"),
        ("Fl(1,3;4)", r"\mathrm{Fl}(1,3;4)"),
        ("LG(3,6)", r"\mathrm{LG}(3,6)"),
        ("Q^5", "Q^{5}"),
        ("E6/P1", "E_{6}/P_{1}"),
        ("C3/P1,3", "C_{3}/P_{1,3}"),
        ("G2/B", "G_{2}/B"),
    ],
)
def test_spaces(name, latex):
    """Each kind of name has its own form."""
    assert latex_space(name) == latex


def test_every_space_has_a_form():
    """No name of a space falls through to plain text."""
    spaces = list(HomogeneousSpaces(most_classes=200).up_to(5))
    assert len(spaces) > 50
    for X in spaces:
        assert "text" not in latex_space(X.name)


@pytest.mark.parametrize("X", [Gr(2, 4), Fl(3), LG(3, 6), IG(2, 6), OG(3, 7), FlagVariety("E6/P1"), FlagVariety("G2/B")])
def test_every_class_has_a_form(X):
    """No class falls through to plain text, and braces match."""
    for u in X.classes:
        made = latex_class(str(u))
        assert "text" not in made
        assert made.count("{") == made.count("}")


def test_what_is_no_class_is_escaped():
    """A text that is no class, name or polynomial is set as text."""
    assert latex_class("a_b") == r"\text{a\_b}"
    assert latex_space("x & y") == r"\text{x \& y}"
    assert latex_polynomial("50%") == r"\text{50\%}"


def test_powers():
    """The power of q is left out in degree 0."""
    assert latex_power((0, 0)) == ""
    assert latex_power((1, 0)) == "q^{(1,0)}"


def test_text():
    """No character of LaTeX keeps its meaning; line ends are spaces; control characters go; other scripts are named."""
    made = latex_text("\\{}$&#%_^~\n\x00\x07é\u05e9\u202e")
    assert made == r"\textbackslash{}\{\}\$\&\#\%\_\textasciicircum{}\textasciitilde{} é{[}U+05E9{]}"
    bare = re.sub(r"\\[a-z]+\{\}|\\[{}$&#%_]|\{\[\}|\{\]\}", "", made)
    assert not set("\\{}$&#%_^~") & set(bare)


def test_notebooks():
    """Spaces, classes, products and polynomials show themselves as mathematics in a notebook."""
    X = Gr(2, 4)
    assert X._repr_latex_() == r"$\mathrm{Gr}(2,4)$"
    assert X.schubert(partition=(2, 1))._repr_latex_() == r"$\sigma_{(2,1)}$"
    assert IG(2, 6).schubert(signed=(1, -3, 2))._repr_latex_() == r"$\sigma_{[1.\bar{3}.2]}$"
    a, b = simple_roots(Fl(3))
    assert (a * a - 2 * b)._repr_latex_() == r"$\alpha_{1}^{2} - 2 \alpha_{2}$"
    u = FlagVariety("G2/B").schubert(word=(1,))
    assert product(u, u)._repr_latex_() == r"$\sigma_{\langle 2.1\rangle} + q^{(1,0)} \sigma_{\langle \rangle}$"


def test_ipython_takes_them():
    """The formatter of IPython chooses these forms by itself."""
    formatters = pytest.importorskip("IPython.core.formatters", reason="IPython is not installed")
    data, _ = formatters.DisplayFormatter().format(Gr(2, 4))
    assert data["text/latex"] == r"$\mathrm{Gr}(2,4)$"
    assert data["text/plain"] == "FlagVariety('Gr(2,4)')"
