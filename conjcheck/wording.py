"""Words for numbers: ``1 row``, ``2 rows``."""

__all__ = ["counted"]


def counted(count: int, one: str, many: str = "") -> str:
    """A number with its noun.

    Args:
        count: how many.
        one: the noun for one of them.
        many: the noun for any other number; without it, ``one`` with an s.

    >>> counted(1, "row"), counted(0, "case"), counted(1234, "class", "classes")
    ('1 row', '0 cases', '1,234 classes')
    """
    return f"{count:,} {one if count == 1 else many or f'{one}s'}"
