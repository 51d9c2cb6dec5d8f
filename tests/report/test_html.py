"""Pages without a browser: what they say, that everything is escaped, that the order of headings and the colours are right."""

import base64
import copy
import hashlib
import re
from importlib.resources import files

import pytest
from page_samples import HOSTILE, NAMES, TAGS, Seen, document, outcomes

from conjcheck.report.document import document_of_outcomes
from conjcheck.report.html import SIGNS, page

STYLE = files("conjcheck.report").joinpath("look.css").read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def pages():
    """All pages, as text and as what they hold."""
    made = {name: page(document(name)) for name in NAMES}
    return {name: (text, Seen(text)) for name, text in made.items()}


@pytest.mark.parametrize("name", NAMES)
def test_one_file_that_loads_nothing(pages, name):
    """No element that loads, no script, no handler, no style of its own, no link but inside the page."""
    _, seen = pages[name]
    tags = [tag for tag, _ in seen.tags]
    assert not {"script", "img", "link", "iframe", "object", "embed", "base", "form", "image", "use"} & set(tags)
    assert tags.count("style") == 1
    for _, attributes in seen.tags:
        assert not [key for key in attributes if key.startswith("on") or key in ("style", "src", "srcset", "action")]
        assert attributes.get("href", "#").startswith("#")


@pytest.mark.parametrize("name", NAMES)
def test_the_policy_allows_only_our_style(pages, name):
    """The content security policy names the hash of the one style, and no script at all."""
    text, seen = pages[name]
    policy = next(a["content"] for a in seen.named("meta") if a.get("http-equiv") == "Content-Security-Policy")
    style = re.search(r"<style>(.*?)</style>", text, re.DOTALL)[1]
    digest = base64.b64encode(hashlib.sha256(style.encode()).digest()).decode()
    assert policy == (
        f"default-src 'none'; style-src 'sha256-{digest}'; script-src 'none'; base-uri 'none'; form-action 'none'; connect-src 'none'"
    )


@pytest.mark.parametrize("name", NAMES)
def test_headings_and_landmarks(pages, name):
    """One h1 first, no level is jumped, and the page has header, navigation, main and footer; ids are unique."""
    _, seen = pages[name]
    assert seen.headings[0] == 1
    assert seen.headings.count(1) == 1
    assert all(b <= a + 1 for a, b in zip(seen.headings, seen.headings[1:], strict=False))
    tags = [tag for tag, _ in seen.tags]
    assert [tags.count(tag) for tag in ("header", "nav", "main", "footer")] == [1, 1, 1, 1]
    ids = [a["id"] for _, a in seen.tags if "id" in a]
    assert len(ids) == len(set(ids))
    assert {a["href"][1:] for a in seen.named("a")} <= set(ids)
    assert seen.named("html") == [{"lang": "en"}]


@pytest.mark.parametrize("name", NAMES)
def test_names_of_regions_and_pictures(pages, name):
    """Whatever scrolls can be reached by keyboard and has a name; every picture is an image with words."""
    _, seen = pages[name]
    ids = {a["id"] for _, a in seen.tags if "id" in a}
    for _, a in seen.tags:
        if "scroll" in a.get("class", "").split():
            assert a["tabindex"] == "0"
            assert a.get("aria-label") or a["aria-labelledby"] in ids
        if a.get("aria-labelledby"):
            assert set(a["aria-labelledby"].split()) <= ids
    for a in seen.named("svg"):
        assert a["role"] == "img"


def test_the_verdict_comes_first(pages):
    """The first section says status, case, values and scope in words."""
    _, seen = pages["lantern"]
    first = seen.text[seen.text.index("≠ refuted") : seen.text.index("its LaTeX")]
    for words in (
        "at Gr(3,5): (2) * (2,1) -> (), q^(1): rule 1, oracle 0",
        "all 9 spaces from Gr(1,2) to Gr(2,5)",
        "all 64 smaller cases",
    ):
        assert words in first


def test_both_products_stand_side_by_side(pages):
    """One row per term with both values; the term that differs is marked by a word and a sign, not by colour alone."""
    text, _ = pages["lantern"]
    table = re.search(r"by the oracle</th><th scope=\"col\">compared.*?</table>", text, re.DOTALL)[0]
    rows = re.findall(r"<tr.*?</tr>", table.split("<tbody>")[1], re.DOTALL)
    plain = [re.sub(r"\s+", " ", re.sub(r"<.*?>", " ", row)).strip() for row in rows]
    assert plain == ["\u03c3 (2,2,1) 1 1 equal", "q^(1) \u03c3 () 1 0 ≠ differs"]
    assert ["differs" in row[:25] for row in rows] == [False, True]


def test_every_part_of_a_refutation_is_there(pages):
    """Kinds, confirmation, objects, layer, coverage, features, derivation, LaTeX, environment."""
    _, seen = pages["lantern"]
    for words in (
        *("overcount, support", "confirmed by", "((1, 1), (1, 2), (2, 1))", "it fails at 2 ordered pairs (u, v) of 100"),
        *("Gr(2,5)agreed, completeall 100 rows", "≠ fails here31 of 100 rows", "Failures by feature", "a derivation by divisors"),
        *("the counterexample in LaTeX", "hypothesis", "Young diagram of v = (2,1)", "rows of 2, 1 boxes"),
    ):
        assert words in seen.text, words


def test_every_bundled_refutation_has_pictures(pages):
    """Young diagrams, Rothe diagrams and strings, heaps: what the space has."""
    for name, words in (("lantern", "Young diagram of u"), ("puzzles", "Rothe diagram of w"), ("cayley", "heap of w")):
        assert words in pages[name][1].text
    assert "string of u = [14325]" in pages["puzzles"][1].text


def test_agreement_says_how_far(pages):
    """The page of a rule that agrees says "as far as checked", what was compared, and that it is no proof; it has no failure."""
    _, seen = pages["agrees"]
    assert "agrees as far as checked" in seen.text
    assert "all 2 spaces from Gr(1,3) to Gr(1,4); 25 rows" in seen.text
    assert "Agreement is not a proof" in seen.text
    assert "Counterexample" not in seen.text


def test_a_crash_shows_problem_remedy_and_traceback(pages):
    """What went wrong, what to do, and where in the rule; bad LaTeX is shown as its source."""
    text, seen = pages["crashed"]
    assert "the rule crashed" in seen.text
    assert "ValueError: expected <b>no</b> lines" in seen.text
    assert "remedy" in seen.text
    assert r"\frac{" in seen.text
    assert "<math" not in text


def test_the_statement_is_mathematics(pages):
    """A statement that is understood is MathML, with its source at hand."""
    text, seen = pages["agrees"]
    assert '<math xmlns="http://www.w3.org/1998/Math/MathML"' in text
    assert r"h^i * h^j" in seen.text


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_texts_are_texts(pages, name):
    """Tags, quotes and hidden characters of a record are shown as text, isolated; no element comes of them."""
    text, seen = pages[name]
    assert TAGS in seen.text
    assert "<script" not in text
    assert "<img" not in text
    assert "\u202e" not in text
    assert "[U+202E]" in text
    assert text.encode()
    assert not [a for tag, a in seen.tags if tag in ("script", "img")]


@pytest.mark.parametrize("name", HOSTILE)
def test_foreign_texts_are_isolated(pages, name):
    """Every right-to-left letter stands inside an element that isolates it."""
    text, _ = pages[name]
    body = re.sub(r"<title>.*?</title>", "", text, flags=re.DOTALL)
    outside = re.sub(r"<bdi>.*?</bdi>", "", body, flags=re.DOTALL)
    assert not re.search("[\u0590-\u06ff]", outside)


def test_many_terms_are_folded_and_none_is_lost():
    """Of many equal terms most are folded away; all that differ are in sight; what was cut off is not called a difference."""
    made = copy.deepcopy(document("lantern"))
    terms = [{"w": "(2,1)", "d": [k], "n": 1} for k in range(100)]
    other = [*terms[:50], {"w": "(2,1)", "d": [50], "n": 7}, *terms[51:]]
    made["failure"]["products"] = {
        "rule": {"terms": terms, "more": 0},
        "oracle": {"terms": other, "more": 0},
        "partial": True,
    }
    text = page(made)
    assert text.count('class="differs"') == 1
    assert "76 more terms, equal on both sides" in text
    assert "asked only where the oracle is not 0" in text
    made["failure"]["products"]["oracle"] = {"terms": other[:60], "more": 40}
    text = page(made)
    assert text.count('class="differs"') == 1
    assert "Not all terms are here: 40 by the oracle are left out" in text


def test_what_was_not_compared_is_said():
    """A space out of reach, one without cases inside the premise, one in part, one drawn: each cell has its words."""
    spaces = [
        {"space": "Gr(1,2)", "seen": 4, "of": 4, "cases": 0},
        {"space": "Gr(2,4)", "seen": 7, "of": 36, "cases": 9},
        {"space": "Gr(2,5)", "drawn": True},
        {"space": "Gr(9,18)", "out_of_reach": True},
    ]
    text = Seen(page(document_of_outcomes([outcomes("agrees")[1] | {"spaces": spaces}]))).text
    for words in (
        *("Gr(1,2)no case in the premise", "Gr(2,4)agreed, in part7 of 36 rows", "Gr(2,5)drawn at random"),
        "Gr(9,18)not comparedout of reach",
    ):
        assert words in text


def test_every_status_has_a_sign_or_a_warning():
    """Agreement and refutation have signs that differ; every other trouble has one, too."""
    assert SIGNS["agrees"] != SIGNS["refuted"]
    assert "!" not in SIGNS.values()


# -- colours ---------------------------------------------------------------------------------------------------------------


def palette(text):
    """The colours of a block of the style, by their names."""
    return dict(re.findall(r"--(\w+): (#[0-9a-f]{3,6});", text))


def luminance(colour):
    """Relative luminance (WCAG 2.2)."""
    digits = colour[1:] if len(colour) == 7 else "".join(2 * x for x in colour[1:])
    parts = [int(digits[k : k + 2], 16) / 255 for k in (0, 2, 4)]
    r, g, b = (x / 12.92 if x <= 0.04045 else ((x + 0.055) / 1.055) ** 2.4 for x in parts)
    return 0.2126 * r + 0.7152 * g + 0.0722 * b


def contrast(a, b):
    """Contrast ratio (WCAG 2.2, success criterion 1.4.3)."""
    high, low = sorted((luminance(a), luminance(b)), reverse=True)
    return (high + 0.05) / (low + 0.05)


BLOCKS = {
    "light": STYLE.split("@media (prefers-color-scheme: dark)")[0],
    "dark": STYLE.split("@media (prefers-color-scheme: dark)")[1].split("}")[0],
    "print": STYLE.split("@media print")[1].split("}")[0],
}


@pytest.mark.parametrize("scheme", BLOCKS)
def test_contrast(scheme):
    """Text has 4.5 to 1 on every ground it stands on, lines of pictures 3 to 1 (WCAG 2.2 AA, 1.4.3 and 1.4.11)."""
    colours = palette(BLOCKS[scheme])
    assert set(colours) == {"paper", "ink", "soft", "line", "faint", "accent", "tint", "raised"}
    for text in ("ink", "soft", "accent"):
        for ground in ("paper", "tint", "raised"):
            assert contrast(colours[text], colours[ground]) >= 4.5, (text, ground)
    assert contrast(colours["paper"], colours["accent"]) >= 4.5
    assert contrast(colours["faint"], colours["paper"]) >= 3


def test_the_measure_of_contrast():
    """Black on white is 21 to 1."""
    assert abs(contrast("#000", "#ffffff") - 21) < 1e-9


def test_every_colour_has_a_name():
    """No rule of the style names a colour outside of the palettes, so that the test above sees them all."""
    rules = re.sub(r":root \{.*?\}", "", STYLE, flags=re.DOTALL)
    assert not re.findall(r"#[0-9a-f]{3,6}\b", rules)
