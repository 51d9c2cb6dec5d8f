"""The root systems of the Chevalley rules, against what Bourbaki's plates say."""

import _root_systems
from root_definitions import CARTAN, matrix_of, roots_and_coroots


def test_cartan_matrices():
    """The matrix built from bonds and lengths is the one of the plates."""
    for kind in CARTAN:
        assert _root_systems.cartan(kind[0], int(kind[1:])) == [list(row) for row in matrix_of(kind)]


def test_roots_and_coroots():
    """Coroots by lengths are coroots by reflections."""
    for kind in CARTAN:
        assert _root_systems.positive_roots(kind[0], int(kind[1:])) == dict(roots_and_coroots(kind))


def test_number_of_positive_roots():
    """There are n(n+1)/2, n^2, n^2, n(n-1) positive roots in types A, B, C, D and 36, 63, 120, 24, 6 in E6, E7, E8, F4, G2."""
    sizes = {"A": lambda n: n * (n + 1) // 2, "B": lambda n: n * n, "C": lambda n: n * n, "D": lambda n: n * (n - 1)}
    for letter, size in sizes.items():
        for n in range(4, 8):
            assert len(_root_systems.positive_roots(letter, n)) == size(n)
    for letter, n, size in (("E", 6, 36), ("E", 7, 63), ("E", 8, 120), ("F", 4, 24), ("G", 2, 6)):
        assert len(_root_systems.positive_roots(letter, n)) == size


def test_highest_roots():
    """The highest roots of the plates."""
    highest = {
        "A5": "11111", "B5": "12222", "C5": "22221", "D5": "12211", "E6": "122321", "E7": "2234321", "E8": "23465432",
        "F4": "2342", "G2": "32",
    }  # fmt: skip
    for kind, root in highest.items():
        assert max(_root_systems.positive_roots(kind[0], int(kind[1:])), key=sum) == tuple(map(int, root))
