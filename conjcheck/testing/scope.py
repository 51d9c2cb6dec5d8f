"""How much was compared, in words that a paper can quote: every "agrees" carries them."""

from conjcheck.conjecture.declare import Conjecture
from conjcheck.evidence.entries import FEWEST_ROWS
from conjcheck.geometry.flag_variety import FlagVariety
from conjcheck.testing.probe import ProbeCount, level_name
from conjcheck.testing.survey import Coverage
from conjcheck.wording import counted

__all__ = ["probe_scope", "survey_scope", "survey_spaces"]

_MOST_NAMED = 12


def survey_spaces(coverage: Coverage) -> str:
    """The spaces a survey has compared: the complete ones, and how far into the last."""
    spaces, parts = coverage.complete, []
    if coverage.named and len(spaces) > 1:
        names = [str(space.X) for space in spaces]
        if len(names) > _MOST_NAMED:
            names[_MOST_NAMED // 2 : -1] = [f"... ({len(names)} spaces)"]
        parts.append(f"all of {', '.join(names)}")
    elif len(spaces) == 1:
        parts.append(f"all of {spaces[0].X}")
    elif spaces:
        parts.append(f"all {len(spaces)} spaces from {spaces[0].X} to {spaces[-1].X}")
    parts += [
        f"the first {space.rows_seen:,} of {space.X.number_of_classes**2:,} rows of {space.X}"
        for space in coverage.spaces
        if space.rows_seen and not space.complete
    ]
    return " and ".join(parts)


def survey_scope(coverage: Coverage, conjecture: Conjecture) -> str:
    """What a survey has compared: the complete spaces, how far into the last, the numbers of rows and cases."""
    if not coverage.rows:
        return "nothing smaller"
    premise = " inside the premise" if conjecture.premise else ""
    numbers = f"{counted(coverage.rows, 'row')}, {counted(coverage.cases, 'case')}{premise}, {coverage.nonzero:,} of them nonzero"
    text = f"{survey_spaces(coverage)}; {numbers}"
    if coverage.whole_family:
        text += "; this is the whole family"
    if coverage.skipped and coverage.spaces:
        gaps = [X for X in coverage.skipped if X < coverage.spaces[-1].X]
        if gaps:
            text += (
                f"; {counted(len(gaps), 'space')} in between {'is' if len(gaps) == 1 else 'are'} out of reach, the first {gaps[0]}"
            )
    return text


def probe_scope(spaces: list[FlagVariety], count: ProbeCount) -> str:
    """What a probe has compared, and the largest share of failing rows that is still compatible with it at 95 %."""
    where = spaces[0].name if len(spaces) == 1 else f"{counted(len(spaces), 'space')} with {level_name(spaces)}"
    sampled = f" ({counted(count.sampled, 'row')} with all nonzero cases and a sample of the zeros)" if count.sampled else ""
    bound = "too few rows for a bound on the failures"
    if count.rows >= FEWEST_ROWS:
        bound = f"taking the draws as independent, at 95 % at most {100 * count.bound:.2g} % of rows, weighted as they are drawn, can fail"
    drawn, cases = counted(count.rows, "row"), counted(count.cases, "case")
    return f"{drawn} drawn at random on {where}, {count.distinct:,} of them distinct, {cases}{sampled}; {bound}"
