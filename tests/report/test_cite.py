"""Words for a paper: what they say is what the record holds, in text and in LaTeX that compiles."""

import re
import shutil
import subprocess
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import conjcheck
from conjcheck import Case, FlagVariety, Grassmannians, Row
from conjcheck.evidence.record import Counterexample, Covered, Record, Sample, read_record_file
from conjcheck.report.cite import LATEX, PLAIN, SOFTWARE, bibtex, citation

ROOT = Path(__file__).parents[2]
HASH = "sha256:" + "0123456789abcdef" * 4
CASE = Case.parse("Gr(3,5): (2) * (2,1) -> (), q^(1)")
BUNDLED = [path for path in sorted((ROOT / "conjectures" / "records").glob("*.json")) if "certificate" not in path.name]


def whole(X, **changes):
    """A complete space with one case per row."""
    count = X.number_of_classes**2
    return replace(Covered(X, count, count, count, count - 1, seconds=1.0, engine="recursion", conjcheck="0.1.0"), **changes)


SMALL = tuple(whole(X) for X in Grassmannians().up_to(4))
PART = Covered(FlagVariety("Gr(3,5)"), rows=31, seen=31, cases=33, nonzero=20, conjcheck="0.1.0")
OPEN = Record("a_rule", "open", ring="quantum", premise=False, rule=HASH, coverage=(*SMALL, PART))


def test_agreement():
    """Scope, numbers, version and hash are all said, zeros included."""
    assert citation(OPEN) == (
        "The conjecture a_rule was compared with the structure constants of the quantum cohomology ring QH*(X): completely on all "
        "Grassmannians Gr(k,n) with n <= 4, and on the first 31 of 100 pairs of Gr(3,5), in the order of conjcheck; every case, zeros "
        "included. They agree there: 121 products, 123 cases, 104 nonzero constants. "
        "Computed by conjcheck 0.1.0 for the version of the rule whose SHA-256 begins with 0123456789ab."
    )


def test_a_family_is_only_named_when_it_is_whole():
    """One space less, and the spaces are listed; one that is not complete is not among the complete ones."""
    lacking = replace(OPEN, coverage=SMALL[:-1])
    assert "all Grassmannians Gr(k,n) with n <= 3, Gr(1,4) and Gr(3,4); every case" in citation(lacking)
    text = citation(replace(OPEN, coverage=(*SMALL[:-1], replace(SMALL[-1], seen=35, rows=35, cases=36, nonzero=20))))
    assert "n <= 4" not in text
    assert f"the first 35 of 36 pairs of {SMALL[-1].X}" in text
    only = citation(replace(OPEN, coverage=(PART,)))
    assert "completely" not in only
    assert "as far as the first 31 of 100 pairs of Gr(3,5)" in only


def test_rings_and_premises():
    """Ring and premise are said as they are on record; what is not known is not claimed."""
    assert "of the cohomology ring H*(X)" in citation(replace(OPEN, ring="classical"))
    assert "equivariant quantum cohomology ring QH*_T(X)" in citation(replace(OPEN, ring="equivariant quantum"))
    assert "equivariant cohomology ring H*_T(X)" in citation(replace(OPEN, ring="equivariant"))
    assert "compared with the structure constants: completely" in citation(replace(OPEN, ring=""))
    assert "every case inside its premise, zeros included" in citation(replace(OPEN, premise=True))
    assert "every case inside its premise, if it has one, zeros included" in citation(replace(OPEN, premise=None))


def test_samples():
    """A sample is quoted with its seed, its numbers and its bound, which is the exact one; a tiny one has none."""
    sample = Sample(FlagVariety("Fl(6)"), "rows drawn uniformly, with repetition", 7, 100, 500, conjcheck="0.2.0")
    text = citation(replace(OPEN, samples=(sample,)))
    assert (
        "On Fl(6), 100 products drawn at random (rows drawn uniformly, with repetition; seed 7) were compared: 500 cases, "
        "none of them wrong; at confidence 95 % the share of such products that fail, weighted as they are drawn, is at most 0.0296."
    ) in text
    assert "Computed by conjcheck 0.1.0 and conjcheck 0.2.0 for" in text
    assert (
        "500 cases, and it fails at 3 products; at confidence 95 % the share of such products that fail, weighted as they are drawn, "
        "is at most 0.0758." in citation(replace(OPEN, samples=(replace(sample, failing=3),)))
    )
    assert "none of them wrong; too few for a bound on the failures." in citation(
        replace(OPEN, samples=(replace(sample, rows=19),))
    )
    hopeless = citation(replace(OPEN, samples=(replace(sample, failing=100),)))
    assert "and it fails at 100 products. Computed by" in hopeless, "no bound of 1 is quoted"
    assert "inside its premise drawn" in citation(replace(OPEN, premise=True, samples=(sample,)))


def test_refutation():
    """A counterexample is quoted with both values, whether it is the smallest, and its certificate or what stands in its place."""
    found = Counterexample(CASE, 1, 0, minimal=True, certificate="a_rule.12345678.certificate.json", rule_hash=HASH)
    text = citation(replace(OPEN, status="refuted", counterexamples=(found,)))
    assert (
        f"It is false: at {CASE} the rule gives 1 instead of 0; this is the smallest counterexample: all smaller cases were compared "
        "and agree; certificate a_rule.12345678.certificate.json."
    ) in text
    bare = Record("a_rule", "refuted", (replace(found, minimal=False, certificate=None, instead="confirmed by two engines"),))
    assert citation(bare) == f"The conjecture a_rule is false: at {CASE} the rule gives 1 instead of 0; confirmed by two engines."
    second = Counterexample(Row.parse("Fl(5): [21543] * [21543]"), None, None, minimal=False)
    text = citation(replace(bare, counterexamples=(*bare.counterexamples, second)))
    assert text.endswith("It is also false: at Fl(5): [21543] * [21543] the statement is false.")
    claim = citation(Record("a_claim", "refuted", (Counterexample(CASE, None, 4, minimal=False),)))
    assert claim.endswith("the statement is false, and the constant is 4.")


def test_an_earlier_version_is_not_this_one():
    """A counterexample to another version of the rule makes nothing false that is said of this one; nor does one to a version unknown."""
    found = Counterexample(CASE, 1, 0, minimal=True, rule_hash="sha256:" + "f" * 64)
    for style in (PLAIN, LATEX):
        text = citation(replace(OPEN, status="refuted", counterexamples=(found,)), style)
        assert "false" not in text
        assert "An earlier version of the rule was refuted " in text
    assert (
        f"An earlier version of the rule was refuted at {CASE}; the SHA-256 of that version begins with ffffffffffff."
        in citation(replace(OPEN, counterexamples=(found,)))
    )
    unknown = citation(replace(OPEN, status="refuted", counterexamples=(replace(found, rule_hash=None),)))
    assert f"A version of the rule that the record does not name was refuted at {CASE}." in unknown
    alone = citation(Record("a_rule", "open", (found,), rule=HASH))
    assert alone.startswith(f"An earlier version of the rule a_rule was refuted at {CASE}")


def test_failures_are_never_called_agreement():
    """A space with failing cases is not among those that agree."""
    wrong = replace(OPEN, coverage=(*SMALL[:-1], replace(SMALL[-1], failing=2)))
    text = citation(wrong)
    assert f"On {SMALL[-1].X} it fails at 2 cases; 36 cases in 36 products were compared there." in text
    assert str(SMALL[-1].X) not in text.split(" They agree there")[0]
    alone = citation(replace(OPEN, coverage=(replace(PART, failing=1),)))
    assert "agree" not in alone
    assert "On the first 31 of 100 pairs of Gr(3,5) it fails at 1 case; 33 cases in" in alone


def test_nothing():
    """Without any entry nothing is claimed; an open record with a counterexample is not passed over."""
    assert citation(Record("a_rule", "open")) == "Nothing is on record as compared for the conjecture a_rule."
    text = citation(Record("a_rule", "open", (Counterexample(CASE, 1, 0, minimal=False),)))
    assert text == "The record calls a_rule open, although it holds 1 counterexample."


def test_latex():
    """In LaTeX spaces, classes and values are mathematics, and names are escaped."""
    found = Counterexample(CASE, 1, "2 alpha1", minimal=False, rule_hash=HASH)
    text = citation(replace(OPEN, status="refuted", counterexamples=(found,)), LATEX)
    assert r"\texttt{a\_rule}" in text
    assert r"all Grassmannians $\mathrm{Gr}(k,n)$ with $n \le 4$" in text
    assert (
        r"for the coefficient of $q^{(1)} \sigma_{()}$ in the product $\sigma_{(2)} * \sigma_{(2,1)}$ on "
        r"$\mathrm{Gr}(3,5)$ the rule gives $1$ instead of $2 \alpha_{1}$"
    ) in text


HOSTILE = st.text(alphabet='\\{}$&#%_^~<>|"`-[]a1 äł\x00\n', max_size=8)


@st.composite
def hostile(draw):
    """A record with odd texts wherever a record has texts."""
    words = draw(HOSTILE) + "x"
    place = draw(
        st.sampled_from(
            [CASE, CASE.row, Case.parse("LG(2,4): (1) * (2) -> (), q^(1)"), Case.parse("Q^3: [2.1] * [-2.1] -> [1.2], q^(1)")]
        )
    )
    found = Counterexample(
        place, draw(st.sampled_from([None, 3, words])), draw(st.sampled_from([None, words])), False, instead=words
    )
    sample = Sample(FlagVariety("E6/P1"), words, 1, 100, 500, conjcheck=words)
    spaces = draw(st.sampled_from([SMALL, (whole(FlagVariety("Q^5")), whole(FlagVariety("D5/P4")), whole(FlagVariety("G2/B")))]))
    return Record("x_", "refuted", (found,), rule=HASH, coverage=(*spaces, replace(PART, conjcheck=words)), samples=(sample,))


@given(hostile())
def test_latex_is_balanced(record):
    """Whatever texts a record holds, braces and dollars balance and no special character is left bare."""
    text = citation(record, LATEX)
    bare = re.sub(r"\\[\\{}$&#%_]", "", text)
    assert bare.count("{") == bare.count("}")
    assert bare.count("$") % 2 == 0
    outside = "".join(re.split(r"\$", bare)[::2])
    assert not re.search(r"[&#%_^~]", outside)
    assert "\x00" not in text


@pytest.mark.skipif(shutil.which("pdflatex") is None, reason="pdflatex is not installed; the structure is tested above")
@settings(max_examples=5, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.lists(hostile(), min_size=15, max_size=15))
def test_it_compiles(tmp_path, odd):
    """The sentences compile, from the bundled records and from odd ones, and so does the BibTeX entry as text."""
    texts = [citation(record, LATEX) for record in [*map(read_record_file, BUNDLED), OPEN, *odd]]
    note = re.search(r"note = \{(.*)\},", bibtex())[1]
    body = "\n\n".join([*texts, note])
    page = f"\\documentclass{{article}}\n\\usepackage{{amsmath}}\n\\begin{{document}}\n{body}\n\\end{{document}}\n"
    (tmp_path / "page.tex").write_text(page, encoding="utf-8")
    words = ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "page.tex"]
    done = subprocess.run(words, cwd=tmp_path, capture_output=True, text=True, errors="replace", check=False)
    assert done.returncode == 0, done.stdout[-2000:]


@pytest.mark.parametrize("path", BUNDLED, ids=lambda path: path.stem)
def test_bundled(path):
    """Every bundled record can be cited, with its name and its counterexamples."""
    record = read_record_file(path)
    text = citation(record, PLAIN)
    assert record.conjecture in text
    assert ("false" in text) is (record.status == "refuted")
    assert all(str(found.where) in text for found in record.counterexamples)


def test_the_software():
    """The BibTeX entry, ``CITATION.cff`` and the package say the same."""
    cff = (ROOT / "CITATION.cff").read_text(encoding="utf-8")
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]

    def field(key):
        return re.search(rf'^\s*-?\s*{key}: "?(.*?)"?$', cff, re.MULTILINE)[1]

    assert (field("title"), field("name"), field("date-released"), field("license")) == (
        SOFTWARE.title,
        SOFTWARE.author,
        SOFTWARE.released,
        SOFTWARE.licence,
    )
    assert " ".join(re.search(r"abstract: >-\n((?:  .*\n)+)", cff)[1].split()) == SOFTWARE.abstract
    assert project["authors"] == [{"name": SOFTWARE.author}]
    assert project["license"] == SOFTWARE.licence
    assert field("version") == conjcheck.__version__
    text = bibtex()
    assert text.startswith(
        "@misc{conjcheck,\n  author = {{The conjcheck developers}},\n  title = {{conjcheck}},\n  year = {2026},\n"
    )
    assert f"note = {{Software, version {conjcheck.__version__}, BSD-3-Clause}}" in text
    assert text.count("{") == text.count("}")
