"""The counterexample in LaTeX: it says what the document says, and it compiles."""

import re
import shutil
import subprocess

import pytest
from page_samples import HALF, TAGS, TURNED, document

from conjcheck.report.latex import latex_page, latex_snippet

REFUTED = ("lantern", "puzzles", "cayley", "record")


def test_it_says_what_the_document_says():
    """Space, classes, degree, both values, both products, and how far it is minimal."""
    text = latex_snippet(document("lantern"))
    assert r"\texttt{lantern\_rule}" in text
    assert r"On $\mathrm{Gr}(3,5)$ let $u = (2)$, $v = (2,1)$, $w = ()$ and $d = (1)$." in text
    assert r"The rule gives $1$, but $N_{u,v}^{w,d} = 0$." in text
    assert r"&= \sigma_{(2,2,1)} + q^{(1)} \sigma_{()} && \text{by the rule}" in text
    assert r"&= \sigma_{(2,2,1)} && \text{by the oracle}" in text
    assert "minimal: all 64 smaller cases agree; found with conjcheck" in text


def test_claims_and_classical_rings():
    """A claim has no value of its own; in a classical ring the constant has no degree."""
    assert r"The claim is false there, since $N_{u,v}^{w,d} = 4$." in latex_snippet(document("cayley"))
    assert r"but $c_{u,v}^{w} = 1$" in latex_snippet(document("puzzles"))


@pytest.mark.parametrize("name", ["agrees", "crashed", "unreadable", "outcome"])
def test_no_counterexample_no_snippet(name):
    """Where nothing is refuted there is nothing to print."""
    assert latex_snippet(document(name)) == ""


def worst():
    """A refuted document whose every text is hostile."""
    found = document("lantern")
    bad = TAGS + TURNED + HALF + r"\end{document} $$ \par % _^~{ ' ` -- \x"
    terms = [{"w": bad, "d": [k], "n": bad} for k in range(60)]
    products = {"rule": {"terms": terms, "more": 5}, "oracle": {"terms": [], "more": 0}, "partial": False}
    failure = found["failure"] | {"where": bad, "rule": bad, "oracle": bad, "minimality": bad, "products": products}
    return found | {"name": bad + "L" * 5000, "environment": bad, "failure": failure}


def test_long_products_are_broken_and_cut():
    """A product of many terms is set on several lines, and cut where nobody reads on."""
    text = latex_snippet(worst())
    assert text.count(r"&\quad + ") == 10
    assert text.count(r"\cdots") == 1


def test_structure():
    """Braces and environments match, and only plain commands are used, in the worst document too."""
    for made in (*(latex_page(document(name)) for name in REFUTED), latex_page(worst())):
        bare = made.replace(r"\{", "").replace(r"\}", "")
        assert bare.count("{") == bare.count("}")
        assert re.findall(r"\\begin\{(.*?)\}", made) == ["document", "align*"] or "align*" not in made
        assert made.count(r"\end{document}") == 1
        assert "\x00" not in made
        made.encode()


@pytest.mark.skipif(shutil.which("pdflatex") is None, reason="pdflatex is not installed")
def test_it_compiles(tmp_path):
    """All snippets together, the worst one last, go through pdflatex without an error."""
    bodies = "\n".join(latex_snippet(made) for made in (*map(document, REFUTED), worst()))
    page = latex_page(document("agrees")).replace("No counterexample.\n", bodies)
    (tmp_path / "page.tex").write_text(page, encoding="utf-8")
    command = ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "-draftmode", "page.tex"]
    done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=False, errors="replace")
    assert done.returncode == 0, done.stdout[-2000:]
