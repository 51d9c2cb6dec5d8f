"""Outcomes in a notebook: a few lines that say the verdict, escaped."""

from dataclasses import replace

import pytest
from page_samples import TAGS, Seen, falls, powers

from conjcheck import examine
from conjcheck.testing.outcome import Outcome


def test_an_outcome_shows_itself():
    """Verdict, statement and scope; nothing of it is markup of the user's."""
    outcome = Outcome(powers, "survey", "agrees", TAGS, note=TAGS)
    seen = Seen(outcome._repr_html_())
    assert "agrees: powers as far as checked" in seen.text
    assert "h^i * h^j" in seen.text
    assert TAGS in seen.text
    assert {tag for tag, _ in seen.tags} == {"div", "p", "strong", "table", "tr", "th", "td"}


def test_a_failure_shows_both_products_or_the_remedy():
    """A refutation shows both products, a crash what to do."""
    crashed = examine(falls, effort="quick", seed=1)[0]
    assert "remedy" in Seen(crashed._repr_html_()).text
    refuted = examine(replace(powers, rule=lambda X, u, v: {}), effort="quick", seed=1)[0]
    text = Seen(refuted._repr_html_()).text
    assert "by the rule0" in text
    assert "by the oraclesigma()" in text


def test_ipython_takes_it():
    """The formatter of IPython chooses the form in HTML by itself."""
    formatters = pytest.importorskip("IPython.core.formatters", reason="IPython is not installed")
    data, _ = formatters.DisplayFormatter().format(Outcome(powers, "survey", "agrees", "all of Gr(1,3)"))
    assert data["text/html"].startswith("<div>")
