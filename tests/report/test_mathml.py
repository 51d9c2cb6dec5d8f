"""LaTeX becomes MathML, or stays what it is; it never becomes anything else."""

from xml.etree import ElementTree as ET

import pytest
from page_samples import CONJECTURES, TAGS, TURNED

from conjcheck.conjecture.discover import conjectures_in_file
from conjcheck.report.mathml import mathml

SPACE = "{http://www.w3.org/1998/Math/MathML}"


def test_statements_of_the_bundled_conjectures():
    """Every bundled statement is understood, and makes one well-formed element of mathematics."""
    found = [c for path in sorted(CONJECTURES.glob("[a-z]*.py")) for c in conjectures_in_file(path)]
    assert len(found) > 15
    for conjecture in found:
        made = ET.fromstring(mathml(conjecture.statement))
        assert made.tag == f"{SPACE}math"
        assert all(element.tag.startswith(f"{SPACE}m") for element in made.iter())


def test_a_formula_is_what_it_says():
    """Letters, indices and relations arrive in order."""
    made = ET.fromstring(mathml(r"N_{u,v}^{w,d} \le 3 \text{ on } E_6/P_1"))
    assert "".join(made.itertext()).replace("\xa0", " ") == "Nu,vw,d≤3 on E6/P1"
    assert made.find(f".//{SPACE}msubsup") is not None


@pytest.mark.parametrize(
    "bad", [r"\frac{", "{" * 400, r"\nonsense{x}", "", "   ", "x" * 4000, "a\u202eb", "a\x00b", r"\begin{cases}"]
)
def test_what_is_not_understood_is_left_alone(bad):
    """Bad, endless, empty LaTeX and hidden characters make no formula, and no error."""
    assert mathml(bad) is None


@pytest.mark.parametrize(
    "bad", [TAGS, rf"\text{{{TAGS}}}", r"\href{javascript:alert(1)}{x}", r"\style{color:red}{x}", r"\text{\<img src=x>}", TURNED]
)
def test_no_markup_comes_through(bad):
    """Whatever is written inside, only elements of mathematics come out, without links, styles and handlers."""
    made = mathml(bad)
    for element in ET.fromstring(made).iter() if made else ():
        assert element.tag.startswith(f"{SPACE}m")
        assert not {"href", "style", "onclick", "class", "id", "src"} & set(element.attrib)


def test_dollars_around_a_formula():
    """A statement between dollars is the same formula."""
    assert mathml("$x$") == mathml("x")
