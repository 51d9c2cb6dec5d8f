"""Words for numbers, ``1 row``, ``2 rows``, and cells in columns."""

from collections.abc import Collection, Sequence

__all__ = ["aligned", "counted"]


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


def aligned(lines: Sequence[Sequence[str]], right: Collection[int] = ()) -> list[list[str]]:
    """The cells of a table filled up with spaces to one width per column; the last column only if it stands on the right.

    Args:
        lines: the rows of the table, all of one length.
        right: the 0-based places of the columns that stand on the right.

    >>> aligned([("space", "rows"), ("Fl(3)", "36")], right={1})
    [['space', 'rows'], ['Fl(3)', '  36']]
    """
    widths = [max(map(len, column)) for column in zip(*lines, strict=True)]
    if widths and len(widths) - 1 not in right:
        widths[-1] = 0
    return [
        [cell.rjust(width) if k in right else cell.ljust(width) for k, (cell, width) in enumerate(zip(line, widths, strict=True))]
        for line in lines
    ]
