"""Pages and the board in a real browser: they load nothing, run nothing that is not ours, and fit on a phone."""

from pathlib import Path
from urllib.parse import unquote, urlparse

import pytest
from browsing import chromium, opened, overflow
from page_samples import HOSTILE, NAMES, TAGS, document

from conjcheck.report.board import board_of_documents, board_page
from conjcheck.report.html import page
from conjcheck.report.pages import write_pages

pytestmark = pytest.mark.browser


@pytest.fixture(scope="module")
def browser():
    """One browser for all tests here."""
    with chromium() as running:
        yield running


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """All pages, and a board of them."""
    place = tmp_path_factory.mktemp("pages")
    for name in NAMES:
        (place / f"{name}.html").write_text(page(document(name)), encoding="utf-8")
    documents = [document(name) for name in NAMES]
    rows = board_of_documents(documents, write_pages(place / "set", documents))
    (place / "set" / "board.html").write_text(board_page(rows, TAGS), encoding="utf-8")
    (place / "board.html").write_text(board_page(rows, TAGS), encoding="utf-8")
    return place


@pytest.mark.parametrize("name", [*NAMES, "board"])
def test_it_fits_and_is_quiet(browser, folder, name):
    """No request but the file, no message, no sideways scrolling at 390 and 1280 pixels; light and dark differ."""
    shots = set()
    with opened(browser, folder / f"{name}.html") as window:
        for width, scheme in ((1280, "light"), (390, "light"), (390, "dark")):
            window.set_viewport_size({"width": width, "height": 900})
            window.emulate_media(color_scheme=scheme)
            assert overflow(window) <= 0, width
            shots.add(window.screenshot())
        assert window.get_by_role("main").count() == 1
        assert window.get_by_role("heading", level=1).is_visible()
    assert len(shots) == 3


@pytest.mark.parametrize("name", HOSTILE)
def test_hostile_texts_do_nothing(browser, folder, name):
    """No element comes of a hostile text, no script runs, no dialog opens; the text itself is shown."""
    with opened(browser, folder / f"{name}.html") as window:
        assert window.evaluate("document.querySelectorAll('script, img, iframe, object, embed, form, [onerror]').length") == 0
        assert TAGS in window.locator("body").text_content()
        assert window.evaluate("document.styleSheets.length") == 1


def test_the_policy_holds(browser, folder):
    """Even if a tag came through, its script and its picture would not: the browser refuses them."""
    path = folder / "injected.html"
    path.write_text(
        page(document("agrees")).replace("</main>", "<script>document.title = 'run'</script><p style='color:red'>x</p></main>")
    )
    with pytest.raises(AssertionError, match="Content Security Policy"), opened(browser, path) as window:
        assert window.title() != "run"
        assert window.evaluate("getComputedStyle(document.querySelector('main > p')).color") != "rgb(255, 0, 0)"


def test_the_style_is_allowed(browser, folder):
    """The style of the page itself has the hash that the policy allows."""
    with opened(browser, folder / "agrees.html", scheme="dark") as window:
        assert window.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(21, 23, 26)"


def test_pictures_have_names(browser, folder):
    """A reader that cannot see finds the pictures by their names."""
    with opened(browser, folder / "lantern.html") as window:
        for name in ("Young diagram of u = (2)", "string of v = (2,1)", "quantum Bruhat graph from (2) to q^(1) ()"):
            assert window.get_by_role("img", name=name, exact=True).count() == 1
        assert window.get_by_role("navigation", name="On this page").count() == 1


def test_focus_is_visible(browser, folder):
    """Whatever has the focus by keyboard has an outline; the first stop leads to the verdict."""
    with opened(browser, folder / "lantern.html") as window:
        window.keyboard.press("Tab")
        assert window.evaluate("document.activeElement.textContent") == "To the verdict"
        stops = 0
        while stops < 200 and window.evaluate("document.activeElement !== document.body"):
            stops += 1
            style = window.evaluate("(s => [s.outlineStyle, parseFloat(s.outlineWidth)])(getComputedStyle(document.activeElement))")
            assert style[0] == "solid"
            assert style[1] >= 2
            window.keyboard.press("Tab")
        assert 15 < stops < 200


def test_wide_things_scroll_in_their_own_box(browser, folder):
    """On a phone the graph is wider than the window, and scrolls by itself."""
    with opened(browser, folder / "cayley.html", width=390) as window:
        box = window.get_by_role("region", name="the graph")
        assert box.evaluate("b => b.scrollWidth > b.clientWidth")


def test_the_board_stacks_on_a_phone(browser, folder):
    """At 390 pixels nothing of the board is hidden at a side: each cell stands below the other with its label, and filters still work."""
    with opened(browser, folder / "board.html", width=390) as window:
        box = window.get_by_role("region", name="conjectures")
        assert box.evaluate("b => b.scrollWidth <= b.clientWidth")
        cells = window.locator("tbody tr").first.locator("th, td:not(.none)")
        lefts = cells.evaluate_all("all => all.map(one => one.getBoundingClientRect().left)")
        tops = cells.evaluate_all("all => all.map(one => one.getBoundingClientRect().top)")
        assert len(lefts) >= 4
        assert len(set(lefts)) == 1
        assert tops == sorted(set(tops))
        label = window.locator("tbody td").first.evaluate("one => getComputedStyle(one, '::before').content")
        assert "status" in label
        window.get_by_label("find").fill("LANTERN")
        assert names(window) == ["lantern_rule"]
        assert window.locator("tbody tr").nth(1).is_hidden()


def test_conditions_fit_on_a_phone(browser, folder):
    """At 390 pixels the table of conditions is not cut; what still scrolls has a shade at the edge behind which there is more."""
    with opened(browser, folder / "lantern.html", width=390) as window:
        fits = window.locator(".scroll[aria-label=conditions]").evaluate("b => b.scrollWidth <= b.clientWidth")
        assert fits
        wide = window.locator(".scroll[aria-label=statement]")
        assert wide.evaluate("b => b.scrollWidth > b.clientWidth")
        layers = wide.evaluate("b => getComputedStyle(b).backgroundAttachment").split(", ")
        assert layers == ["local", "local", "scroll", "scroll"]


def test_paper(browser, folder):
    """Printed, the page is dark on white and without its list of contents."""
    with opened(browser, folder / "lantern.html", scheme="dark") as window:
        window.emulate_media(media="print", color_scheme="dark")
        assert window.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"
        assert not window.get_by_role("navigation").is_visible()


def names(window):
    """The conjectures in sight, in order."""
    return window.locator("tbody tr:not([hidden]) th").evaluate_all(
        "all => all.map(one => one.firstElementChild.textContent.trim())"
    )


def test_the_board_sorts_by_keyboard(browser, folder):
    """Enter on a column's head sorts it rising, then falling, and says so to readers; all rows stay."""
    with opened(browser, folder / "board.html") as window:
        before = names(window)
        head = window.get_by_role("columnheader", name="status")
        head.get_by_role("button").focus()
        window.keyboard.press("Enter")
        assert head.get_attribute("aria-sort") == "ascending"
        rising = window.locator("tbody tr").evaluate_all("all => all.map(one => one.dataset.status)")
        window.keyboard.press("Enter")
        assert head.get_attribute("aria-sort") == "descending"
        falling = window.locator("tbody tr").evaluate_all("all => all.map(one => one.dataset.status)")
        assert rising[0] != falling[0]
        assert sorted(rising) == sorted(falling)
        assert sorted(names(window)) == sorted(before)
        window.keyboard.press("Tab")
        window.keyboard.press("Space")
        assert window.locator("th[aria-sort]").count() == 1
        assert window.get_by_role("columnheader", name="compared").get_attribute("aria-sort") == "ascending"


def test_the_board_filters_by_keyboard(browser, folder):
    """Typing keeps the rows that hold the words; the status can be chosen; how many are shown is announced."""
    with opened(browser, folder / "board.html") as window:
        window.get_by_label("find").focus()
        window.keyboard.type("LANTERN")
        assert names(window) == ["lantern_rule"]
        assert window.get_by_role("status").text_content() == f"1 of {len(NAMES)} shown"
        for _ in "LANTERN":
            window.keyboard.press("Backspace")
        window.keyboard.press("Tab")
        window.keyboard.type("agrees")
        assert names(window) == ["powers"]
        window.get_by_label("find").fill("nothing of this kind")
        assert names(window) == []
        assert window.get_by_role("status").text_content() == f"0 of {len(NAMES)} shown"


def test_the_board_without_script(browser, folder):
    """Without script all rows are there, and nothing that would not work."""
    with opened(browser, folder / "board.html", script=False) as window:
        assert len(names(window)) == len(NAMES)
        assert not window.get_by_label("find").is_visible()


def test_links_of_the_board_lead_to_pages(browser, folder):
    """Every name on a board in the folder of the pages is a link to its page, whatever the name is."""
    with opened(browser, folder / "set" / "board.html") as window:
        links = window.locator("tbody a").evaluate_all("all => all.map(one => one.href)")
    assert len(links) == len(NAMES)
    for link in links:
        assert Path(unquote(urlparse(link).path)).is_file()
