"""A headless Chromium for tests: pages that are opened from files, and everything they do that a page of ours must not do."""

import shutil
from contextlib import contextmanager

import pytest

CHROMIUM = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome", "chrome"))), None)


def needs_browser():
    """Skip, with the reason, where no browser can be driven."""
    if CHROMIUM is None:
        pytest.skip("no Chromium is installed")
    return pytest.importorskip("playwright.sync_api", reason="playwright is not installed")


@contextmanager
def chromium():
    """A running browser."""
    room = needs_browser()
    with room.sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=CHROMIUM, args=["--no-sandbox"])
        try:
            yield browser
        finally:
            browser.close()


@contextmanager
def opened(browser, path, *, width=1280, scheme="light", script=True):
    """A file in a fresh window. At its end nothing may have been asked for but the file, nothing said, no dialog opened."""
    context = browser.new_context(
        viewport={"width": width, "height": 900}, color_scheme=scheme, java_script_enabled=script, reduced_motion="reduce"
    )
    page = context.new_page()
    asked, said = [], []
    page.on("request", lambda request: asked.append(request.url))
    page.on("console", lambda message: said.append(message.text))
    page.on("pageerror", lambda error: said.append(str(error)))

    def dismissed(dialog):
        said.append(f"dialog: {dialog.message}")
        dialog.dismiss()

    page.on("dialog", dismissed)
    try:
        page.goto(path.as_uri())
        yield page
        page.wait_for_timeout(20)
        assert asked == [path.as_uri()], f"the page asked for {asked}"
        assert said == [], f"the page said {said}"
    finally:
        context.close()


def overflow(page):
    """By how many pixels the page is wider than the window."""
    return page.evaluate("document.documentElement.scrollWidth - document.documentElement.clientWidth")
