"""How the tests of strategies draw: always the same examples, without a database."""

from collections.abc import Callable
from typing import Any

import pytest
from hypothesis import HealthCheck, Phase, find, given, settings
from hypothesis import strategies as st

QUIET = settings(
    database=None, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck), phases=[Phase.generate, Phase.shrink]
)


@pytest.fixture(scope="session")
def drawn() -> Callable[..., list[Any]]:
    """The first examples of a strategy."""

    def draw(strategy: st.SearchStrategy[Any], count: int = 100) -> list[Any]:
        examples = []

        @settings(QUIET, max_examples=count)
        @given(strategy)
        def collect(example: Any) -> None:
            examples.append(example)

        collect()
        return examples

    return draw


@pytest.fixture(scope="session")
def smallest() -> Callable[..., Any]:
    """What a strategy shrinks to."""

    def shrink(strategy: st.SearchStrategy[Any], condition: Callable[[Any], bool] = lambda _: True) -> Any:
        return find(strategy, condition, settings=settings(QUIET, max_examples=2000))

    return shrink
