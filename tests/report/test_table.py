"""Tables of structure constants: read back by general readers, they are the products of the oracle."""

import csv
import json
import re
import shutil
import subprocess
from itertools import pairwise

import pytest

from conjcheck import Case, Fl, FlagVariety, product
from conjcheck.errors import NotationError
from conjcheck.geometry.case import parse_class
from conjcheck.report.table import FORMS, ORDERS, TableOptions, class_text, notations, table_lines


def lines_of(X, form="csv", notation="", order="cases", *, half=False):
    """The lines of a table."""
    return list(table_lines(X, TableOptions(form, notation, order, half)))


def read_csv(X, lines):
    """The constants of a CSV table: ``[(u, v, w, d, N)]`` with texts for classes."""
    head, *body = csv.reader(line for line in lines if not line.startswith("#"))
    assert head == ["u", "v", "w", *(f"d{i}" for i in X.marked), "N"]
    return [(u, v, w, tuple(map(int, d)), int(N)) for u, v, w, *d, N in body]


def read_json(lines):
    """The same of JSON lines, with the head and the end."""
    head, *body, end = map(json.loads, lines)
    return head, [(c["u"], c["v"], c["w"], tuple(c["d"]), c["N"]) for c in body], end


def expected(X, *, half=False):
    """All constants by the oracle, product by product, as cases."""
    return {
        Case(X, u, v, w, d): N
        for u in X.classes
        for v in X.classes
        if not half or u.index <= v.index
        for (w, d), N in product(u, v).items()
    }


@pytest.mark.parametrize(("name", "count"), [("Fl(3)", 45), ("Fl(4)", 1168)])
@pytest.mark.parametrize("order", ORDERS)
def test_csv_read_back(name, count, order):
    """The CSV, read by the standard library, holds every nonzero constant once: 45 for Fl(3), 1168 for Fl(4) (design: published counts)."""
    X = FlagVariety(name)
    lines = lines_of(X, order=order)
    found = read_csv(X, lines)
    assert len(found) == count
    assert lines[-1] == f"# end: {count} constants\n"
    read = {Case(X, *(parse_class(X, text) for text in (u, v, w)), d): N for u, v, w, d, N in found}
    assert len(read) == count, "no constant stands twice"
    assert read == expected(X)


@pytest.mark.parametrize("name", ["Gr(2,5)", "Fl(1,3;4)", "LG(3,6)", "G2/B", "E6/P1", "Q^3"])
def test_json_read_back(name):
    """The JSON lines say the same as the products, in every type, with the number of constants at the end."""
    X = FlagVariety(name)
    head, found, end = read_json(lines_of(X, "json"))
    assert (head["format"], head["version"]) == ("conjcheck-table", 1)
    assert end == {"end": True, "constants": len(found)}
    assert {Case(X, *(parse_class(X, text) for text in (u, v, w)), d): N for u, v, w, d, N in found} == expected(X)


@pytest.mark.parametrize("form", ["csv", "json"])
def test_the_order_of_cases(form):
    """By default the lines come in the order of cases."""
    X = Fl(3)
    lines = lines_of(X, form)
    found = read_csv(X, lines) if form == "csv" else read_json(lines)[1]
    cases = [Case(X, *(parse_class(X, text) for text in (u, v, w)), d) for u, v, w, d, _ in found]
    assert all(first < second for first, second in pairwise(cases))


def test_the_order_of_blocks():
    """In blocks every u comes once, and within it the lines are sorted by v, then as in a product."""
    X = Fl(4)
    found = read_csv(X, lines_of(X, order="blocks"))
    keys = [(u, parse_class(X, v).index, sum(d), d, parse_class(X, w).index) for u, v, w, d, _ in found]
    assert all(first[1:] < second[1:] for first, second in pairwise(keys) if first[0] == second[0])
    changes = sum(first[0] != second[0] for first, second in pairwise(keys))
    assert changes == len(X.classes) - 1


@pytest.mark.parametrize("order", ORDERS)
def test_half(order):
    """Half a table has the pairs with u <= v, says so, and gives the whole by commutativity."""
    X = FlagVariety("Fl(1,3;4)")
    lines = lines_of(X, order=order, half=True)
    assert "# pairs: u <= v in the order of classes; N is symmetric in u and v\n" in lines
    read = {Case(X, *(parse_class(X, t) for t in (u, v, w)), d): N for u, v, w, d, N in read_csv(X, lines)}
    assert read == expected(X, half=True)
    assert read | {Case(X, c.v, c.u, c.w, c.d): N for c, N in read.items()} == expected(X)


@pytest.mark.parametrize("name", ["Gr(2,4)", "Fl(3)", "Fl(1,3;4)", "LG(2,4)", "Q^5", "OG(3,7)", "E6/P1", "Gr(1,11)"])
def test_notations(name):
    """In every notation of a space its classes have different names, which are those that are read."""
    X = FlagVariety(name)
    for notation in notations(X):
        names = [class_text(u, notation) for u in X.classes]
        assert len(set(names)) == len(names)
        for u, text in zip(X.classes, names, strict=True):
            if notation == "index":
                assert X.classes[int(text)] is u
            elif notation == "string":
                assert X.schubert(string=text) is u
            else:
                assert parse_class(X, text) is u
        found = read_json(lines_of(X, "json", notation))[1] if X.number_of_classes < 13 else []
        for u, v, w, d, N in found:
            a, b, c = (X.classes[names.index(text)] for text in (u, v, w))
            assert product(a, b)[c, d] == N
    assert {class_text(u, "") == str(u.index) for u in X.classes} == {True}


def test_the_default_notation():
    """Without a choice the classes are written as conjcheck prints them."""
    for name in ("Gr(2,4)", "Fl(3)", "LG(2,4)", "Q^3", "G2/P1"):
        X = FlagVariety(name)
        assert {u for u, *_ in read_csv(X, lines_of(X))} == set(map(str, X.classes))


def test_the_head():
    """The head names space, notation, degrees, order, version and engine, so that the file can be read without conjcheck."""
    import conjcheck

    head = dict(re.fullmatch(r"# (\w+): (.*)\n", line).groups() for line in lines_of(FlagVariety("Fl(1,3;4)"))[:8])
    assert head["space"].startswith("Fl(1,3;4): type A3, marked nodes 1,3 ")
    assert head["classes"] == "12 classes, in codimension 0 to 5; sigma_u has codimension l(u)"
    assert "one-line notation" in head["notation"]
    assert head["degree"].startswith("d1, d3: one entry per marked node; deg q1 = 3, deg q3 = 3; l(u) + l(v) = l(w) + ")
    assert head["order"].startswith("rows in the order of cases")
    assert head["software"] == f"conjcheck {conjcheck.__version__}, engine recursion"
    assert "all others are 0" in head["table"]


def test_it_is_streamed(monkeypatch):
    """The first lines come before the later products are computed."""
    from conjcheck.report import table as room

    asked = []
    honest = room.row_terms
    monkeypatch.setattr(room, "row_terms", lambda u, v: asked.append((u, v)) or honest(u, v))
    lines = table_lines(Fl(5), TableOptions())
    for _ in range(12):
        next(lines)
    assert 0 < len(asked) < 12


def test_refused():
    """A form, an order or a notation that there is not is refused at once, with those that there are."""
    for options in (TableOptions("xml"), TableOptions(order="random"), TableOptions(notation="partition")):
        with pytest.raises(NotationError, match=r"expected (form|order|notation) to be one of .* on Fl\(3\), got"):
            table_lines(Fl(3), options)


@pytest.mark.parametrize("name", ["Fl(3)", "Q^3", "G2/P1", "Gr(2,4)"])
def test_latex(name, tmp_path):
    """The LaTeX has one row per product and as many terms as there are constants, and compiles."""
    X = FlagVariety(name)
    for notation in notations(X):
        lines = lines_of(X, "latex", notation, half=True)
        rows = [line for line in lines if line.startswith("$\\sigma")]
        assert len(rows) == len(X.classes) * (len(X.classes) + 1) // 2
        terms = sum(line.count("\\sigma") - 2 for line in rows)
        assert lines[-1] == f"% end: {terms} constants\n"
        assert terms == len(expected(X, half=True))
        text = "".join(lines)
        assert text.count("{") == text.count("}")
        if shutil.which("pdflatex"):
            compiles(text, tmp_path)


def compiles(body, folder):
    """Run pdflatex on a body."""
    page = f"\\documentclass{{article}}\n\\usepackage{{amsmath,longtable}}\n\\begin{{document}}\n{body}\\end{{document}}\n"
    (folder / "page.tex").write_text(page, encoding="utf-8")
    words = ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "page.tex"]
    done = subprocess.run(words, cwd=folder, capture_output=True, text=True, errors="replace", check=False)
    assert done.returncode == 0, done.stdout[-2000:]


def test_forms():
    """The forms are those that the command offers."""
    from conjcheck.cli.table import command

    offered = {option.name: option.type for option in command.params}
    assert tuple(offered["form"].choices) == FORMS
    assert tuple(offered["order"].choices) == tuple(ORDERS)
