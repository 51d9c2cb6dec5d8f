"""The benchmark program: one run measures ours and the plain way side by side on this machine and prints the ratios.

    python tests/benchmarks/run.py             # everything, about four minutes
    python tests/benchmarks/run.py table probe # only these parts

Every measurement is made in a fresh interpreter and repeated; the median is printed, the measurements of the two sides
alternate. Imports are not timed (but for the part ``import``); set-up is, in the part ``table``.
"""

import argparse
import json
import os
import platform
import random
import statistics
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from time import perf_counter, process_time

HERE = Path(__file__).resolve()
CONSTANTS_OF_FL_6 = 6_531_372
CONSTANTS_OF_FL_7 = 1_226_998_416

# --- measurements: each runs alone in a fresh interpreter and returns one number ---


def table_ours() -> float:
    """Seconds for the whole table of Fl(6), every constant delivered in the block arrays and added up."""
    from conjcheck import Fl, table

    began = perf_counter()
    count = total = degrees = 0
    for block in table(Fl(6)):
        count += len(block)
        total += int(block.N.sum())
        degrees += int(block.d.sum()) + int(block.v.sum()) + int(block.w.sum())
    seconds = perf_counter() - began
    assert count == CONSTANTS_OF_FL_6 < total < degrees
    return seconds


def table_plain() -> float:
    """Seconds of the plain script for the same, left in its matrices."""
    from plain_scipy import fill

    began = perf_counter()
    count = sum(matrix.nnz for matrix in fill(6).matrices)
    seconds = perf_counter() - began
    assert count == CONSTANTS_OF_FL_6
    return seconds


def _rate_ours(n: int) -> float:
    """Processor seconds per million constants of the streamed table of Fl(n), set-up included."""
    from conjcheck import Fl, table

    began, count, total = process_time(), 0, 0
    for block in table(Fl(n)):
        count += len(block)
        total += int(block.N.sum()) + int(block.d.sum()) + int(block.v.sum()) + int(block.w.sum())
    assert count < total
    return 1e6 * (process_time() - began) / count


def _rate_plain(n: int) -> float:
    """Processor seconds per million constants of the plain script, left in its matrices."""
    from plain_scipy import fill

    began = process_time()
    count = sum(matrix.nnz for matrix in fill(n).matrices)
    return 1e6 * (process_time() - began) / count


def rate_ours_4() -> float:
    """Fl(4), 1,168 constants: mostly set-up."""
    return _rate_ours(4)


def rate_plain_4() -> float:
    """The plain script there."""
    return _rate_plain(4)


def rate_ours_5() -> float:
    """Fl(5), 62,925 constants."""
    return _rate_ours(5)


def rate_plain_5() -> float:
    """The plain script there."""
    return _rate_plain(5)


def rate_ours_6() -> float:
    """Fl(6), 6,531,372 constants."""
    return _rate_ours(6)


def rate_plain_6() -> float:
    """The plain script there."""
    return _rate_plain(6)


def stream_ours_7() -> float:
    """Processor seconds for all 1,226,998,416 constants of Fl(7), set-up included; about 100."""
    return _rate_ours(7) * CONSTANTS_OF_FL_7 / 1e6


def stream_plain_7() -> float:
    """Processor seconds of the plain script for all of Fl(7), extrapolated from all of Fl(6) by the number of constants.

    Fl(7) itself takes it about an hour and tens of gigabytes, and a small share of it hardly less: the operators on all columns alone are
    13 GB. Its rate may be another one there, so this is an estimate, not a measurement.
    """
    return _rate_plain(6) * CONSTANTS_OF_FL_7 / 1e6


def _products(n: int, count: int, *, forgetting: bool) -> float:
    """Median milliseconds of ``product`` over random rows after set-up; with ``forgetting`` each row starts without
    remembered products.
    """
    from conjcheck import Fl, product
    from conjcheck.oracle.recursion import complete_flag_ring

    X = Fl(n)
    ring = complete_flag_ring(X)
    product(X.point, X.point)  # set-up
    chooser = random.Random(2024)
    times = []
    for _ in range(count):
        u, v = chooser.choice(X.classes), chooser.choice(X.classes)
        if forgetting:
            ring._sweeps.clear()
        began = perf_counter()
        product(u, v)
        times.append(perf_counter() - began)
    return 1000 * statistics.median(times)


def products_6() -> float:
    """Milliseconds per product on Fl(6), nothing remembered from other rows."""
    return _products(6, 200, forgetting=True)


def products_7() -> float:
    """Milliseconds per product on Fl(7), nothing remembered from other rows."""
    return _products(7, 50, forgetting=True)


def products_6_remembering() -> float:
    """Milliseconds per product on Fl(6) in the course of many."""
    return _products(6, 200, forgetting=False)


def products_7_remembering() -> float:
    """Milliseconds per product on Fl(7) in the course of many."""
    return _products(7, 50, forgetting=False)


def _plain_rows(n: int, count: int) -> float:
    """Median milliseconds of a plain recursion for one row: dictionaries, quantum Monk, no symmetry."""
    from plain_rows import one_row, prepare

    from conjcheck import Fl, product

    ring = prepare(n)
    chooser = random.Random(2024)
    times = []
    for _ in range(count):
        u, v = chooser.choice(ring.perms), chooser.choice(ring.perms)
        began = perf_counter()
        row = one_row(ring, u, v)
        times.append(perf_counter() - began)
    factors = (Fl(n).schubert(permutation=[x + 1 for x in w]) for w in (u, v))
    expected = {(tuple(x - 1 for x in w.permutation), d): count for (w, d), count in product(*factors).items()}
    assert row == expected, "both sides must compute the same"
    return 1000 * statistics.median(times)


def plain_rows_6() -> float:
    """The plain recursion on Fl(6)."""
    return _plain_rows(6, 200)


def plain_rows_7() -> float:
    """The plain recursion on Fl(7)."""
    return _plain_rows(7, 50)


def _localised(name: str, count: int, *, single: bool) -> float:
    """Median milliseconds by localisation after set-up: whole products, or one nonzero constant of each, a class seen before."""
    from conjcheck import FlagVariety
    from conjcheck.oracle.localisation import localisation

    X = FlagVariety(name)
    engine = localisation(X)
    chooser = random.Random(2024)
    pairs = [tuple(chooser.choices(X.classes, k=2)) for _ in range(count)]
    rows = [engine.row(u, v) for u, v in pairs]  # set-up
    times = []
    for (u, v), row in zip(pairs, rows, strict=True):
        w, d = chooser.choice(list(row))
        engine.constant(u, v, w, d)
        began = perf_counter()
        found = engine.constant(u, v, w, d) if single else engine.row(u, v)
        times.append(perf_counter() - began)
        assert found == (row[w, d] if single else row)
    return 1000 * statistics.median(times)


def constants_e8() -> float:
    """Milliseconds for one constant on E8/P8."""
    return _localised("E8/P8", 200, single=True)


def rows_e8() -> float:
    """Milliseconds for one product on E8/P8."""
    return _localised("E8/P8", 200, single=False)


def constants_gr_10() -> float:
    """Milliseconds for one constant on Gr(5,10)."""
    return _localised("Gr(5,10)", 200, single=True)


def rows_gr_10() -> float:
    """Milliseconds for one product on Gr(5,10)."""
    return _localised("Gr(5,10)", 200, single=False)


def constants_two_steps() -> float:
    """Milliseconds for one constant on Fl(2,4;6)."""
    return _localised("Fl(2,4;6)", 100, single=True)


def rows_two_steps() -> float:
    """Milliseconds for one product on Fl(2,4;6)."""
    return _localised("Fl(2,4;6)", 100, single=False)


def _import_seconds(module: str) -> float:
    """Milliseconds that a fresh interpreter takes to import a module and end."""
    command = [sys.executable, "-c", f"import {module}"]
    subprocess.run(command, check=True)  # fill the caches of the file system
    began = perf_counter()
    subprocess.run(command, check=True)
    return 1000 * (perf_counter() - began)


def import_ours() -> float:
    """``import conjcheck``."""
    return _import_seconds("conjcheck")


def import_numpy() -> float:
    """``import numpy``."""
    return _import_seconds("numpy")


def import_nothing() -> float:
    """``import sys``: the interpreter alone."""
    return _import_seconds("sys")


def _free_rule(X):
    """A rule on X, case by case, that costs next to nothing and is right: a look-up in a dictionary made before the clock
    starts.
    """
    from conjcheck import Varieties, candidate, product

    known = {(u, v, w, d): count for u in X.classes for v in X.classes for (w, d), count in product(u, v).items()}

    @candidate(on=Varieties(X))
    def looked_up(X, u, v, w, d):
        return known.get((u, v, w, d), 0)

    return looked_up


def survey_ours() -> float:
    """Cases per second of a survey of Fl(4), zeros included, with a rule that costs next to nothing."""
    from conjcheck import Fl
    from conjcheck.testing.compare import Comparer
    from conjcheck.testing.survey import survey

    rule = _free_rule(Fl(4))
    began = perf_counter()
    found = survey(Comparer(rule), budget=600.0)
    seconds = perf_counter() - began
    assert found.finding is None
    assert not found.ran_out
    assert found.coverage.whole_family
    return found.coverage.cases / seconds


def probe_ours() -> float:
    """Cases per second of a probe of Fl(5): Hypothesis draws rows, each compared whole, zeros included."""
    from hypothesis import settings

    from conjcheck import Fl
    from conjcheck.testing.compare import Comparer
    from conjcheck.testing.probe import ProbeCount, run_probe

    X = Fl(5)
    comparer, count = Comparer(_free_rule(X)), ProbeCount()

    def check(row, choice) -> None:
        with comparer.limit:
            result = comparer.row(row)
        assert result.finding is None
        assert result.complete
        count.add(row, result.cases, result.nonzero)

    settings.register_profile("benchmark", max_examples=300)
    settings.load_profile("benchmark")
    began = perf_counter()
    run_probe(check, [X], comparer, count, seed=1)
    return count.cases / (perf_counter() - began)


def hypothesis_plain_4() -> float:
    """Cases per second of the plain Hypothesis test on Fl(4)."""
    from plain_hypothesis import cases_per_second

    return cases_per_second(4, 3000)


def hypothesis_plain_5() -> float:
    """Cases per second of the plain Hypothesis test on Fl(5)."""
    from plain_hypothesis import cases_per_second

    return cases_per_second(5, 3000)


def _draws(name: str) -> float:
    """Milliseconds of one example with Hypothesis, keeping nothing; a first short run is not counted."""
    from hypothesis import HealthCheck, given, settings
    from hypothesis import strategies as st

    from conjcheck import Fl, Varieties
    from conjcheck.strategies import rows

    X = Fl(6)
    strategies = {"rows": rows(Varieties(X)), "pairs": st.tuples(st.sampled_from(X.classes), st.sampled_from(X.classes))}

    def draw(examples: int) -> float:
        @settings(database=None, deadline=None, max_examples=examples, suppress_health_check=list(HealthCheck))
        @given(strategies[name])
        def nothing(example: object) -> None:
            pass

        began = process_time()
        nothing()
        return 1000 * (process_time() - began) / examples

    draw(20)
    return draw(1000)


def draw_rows() -> float:
    """Rows on Fl(6)."""
    return _draws("rows")


def draw_pairs() -> float:
    """Two plain indices on Fl(6)."""
    return _draws("pairs")


# --- the table of what is set against what ---

Measurement = Callable[[], float]
Line = tuple[str, str, Measurement, Measurement | None, int]

PARTS: dict[str, list[Line]] = {
    "table": [("whole table of Fl(6), every constant", "s", table_ours, table_plain, 5)],
    "stream": [
        ("Fl(4), per million constants, processor", "s", rate_ours_4, rate_plain_4, 3),
        ("Fl(5), per million constants, processor", "s", rate_ours_5, rate_plain_5, 3),
        ("Fl(6), per million constants, processor", "s", rate_ours_6, rate_plain_6, 3),
        ("all of Fl(7), processor | plain: at its rate on Fl(6)", "s", stream_ours_7, stream_plain_7, 1),
    ],
    "product": [
        ("one product on Fl(6), nothing remembered", "ms", products_6, plain_rows_6, 3),
        ("one product on Fl(7), nothing remembered", "ms", products_7, plain_rows_7, 3),
        ("one product on Fl(6), in the course of 200", "ms", products_6_remembering, plain_rows_6, 3),
        ("one product on Fl(7), in the course of 50", "ms", products_7_remembering, plain_rows_7, 3),
    ],
    "constant": [
        ("E8/P8, localisation: one constant | its whole product", "ms", constants_e8, rows_e8, 3),
        ("Gr(5,10), localisation: one constant | its whole product", "ms", constants_gr_10, rows_gr_10, 3),
        ("Fl(2,4;6), localisation: one constant | its product", "ms", constants_two_steps, rows_two_steps, 3),
    ],
    "import": [
        ("import conjcheck | import numpy", "ms", import_ours, import_numpy, 7),
        ("(the interpreter alone)", "ms", import_nothing, None, 7),
    ],
    "survey": [("survey of Fl(4), free rule by cases | one case per example", "cases/s", survey_ours, hypothesis_plain_4, 3)],
    "draw": [("one row on Fl(6), drawn | a pair of plain indices", "ms", draw_rows, draw_pairs, 5)],
    "probe": [("probe of Fl(5), free rule by cases | one case per example", "cases/s", probe_ours, hypothesis_plain_5, 3)],
}


def measured(measurement: Measurement) -> float:
    """One measurement in a fresh interpreter."""
    command = [sys.executable, str(HERE), "--measure", measurement.__name__]
    done = subprocess.run(command, check=True, capture_output=True, text=True, cwd=HERE.parent)
    return float(json.loads(done.stdout.splitlines()[-1]))


def main() -> None:
    """Measure the parts named on the command line, or all, and print the table."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("parts", nargs="*", help=f"any of {', '.join(PARTS)}")
    parser.add_argument("--measure", help=argparse.SUPPRESS)
    chosen = parser.parse_args()
    if chosen.measure:
        print(json.dumps(globals()[chosen.measure]()))
        return
    if unknown := set(chosen.parts) - set(PARTS):
        parser.error(f"expected parts among {', '.join(PARTS)}, got {', '.join(sorted(unknown))}")
    print(f"Python {platform.python_version()}, {os.cpu_count()} cores, {platform.machine()}; medians; fresh interpreters")
    print(f"{'':60}{'ours':>12}{'plain':>12} {'':8}{'ratio':>8}")
    for part in chosen.parts or PARTS:
        for title, unit, ours, plain, repeats in PARTS[part]:
            mine, theirs = [], []
            for _ in range(repeats):
                mine.append(measured(ours))
                if plain is not None:
                    theirs.append(measured(plain))
            a = statistics.median(mine)
            if not theirs:
                print(f"{title:60}{a:12,.3f}{'':12} {unit:8}", flush=True)
                continue
            b = statistics.median(theirs)
            ratio = a / b if unit.endswith("/s") else b / a
            print(f"{title:60}{a:12,.3f}{b:12,.3f} {unit:8}{ratio:8.1f}", flush=True)


if __name__ == "__main__":
    main()
