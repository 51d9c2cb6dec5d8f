"""Published presentations and Giambelli formulas of isotropic Grassmannians, by operators: no oracle is used here.

A vector is ``{(class, d): coefficient}``, d the power of the one q; an operator takes a vector to a vector. A special class ``sigma_k``
multiplies by a Pieri rule that is handed in; for k = 0 it is 1, and it is 0 for k < 0 and for k above the longest row.
"""

from collections import Counter
from collections.abc import Callable

from conjcheck import FlagVariety, SchubertClass

Vector = Counter
Operator = Callable[[Vector], Vector]
Special = Callable[[int], Operator]


def basis(u: SchubertClass) -> Vector:
    """``sigma_u``."""
    return Counter({(u, 0): 1})


def combine(*terms: tuple[int, int, Vector]) -> Vector:
    """The sum of ``coefficient * q^e * vector`` over triples, without zeros."""
    result: Vector = Counter()
    for factor, e, vector in terms:
        for (u, d), coefficient in vector.items():
            result[u, d + e] += factor * coefficient
    return Counter({key: c for key, c in result.items() if c})


def special(X: FlagVariety, rule: Callable) -> Special:
    """From k to the operator of the special class with one row of k boxes."""
    longest = max(X.point.partition)

    def of(k: int) -> Operator:
        def times(vector: Vector) -> Vector:
            if k == 0:
                return vector
            result: Vector = Counter()
            if 0 < k <= longest:
                for (u, d), coefficient in vector.items():
                    for (w, (e,)), factor in rule(X, X.schubert(partition=(k,)), u).items():
                        result[w, d + e] += coefficient * factor
            return result

        return times

    return of


def lagrangian_pair(n: int, s: Special, i: int, j: int, vector: Vector) -> Vector:
    """``sigma_{i,j} = s_i s_j + 2 sum (-1)^k s_{i+k} s_{j-k} + (-1)^(n+1-i) q s_{i+j-n-1}``, i > j: Kresch and Tamvakis (2003)."""
    sums = [(2 * (-1) ** k, 0, s(i + k)(s(j - k)(vector))) for k in range(1, j + 1)]
    return combine((1, 0, s(i)(s(j)(vector))), *sums, ((-1) ** (n + 1 - i), 1, s(i + j - n - 1)(vector)))


def orthogonal_pair(n: int, s: Special, i: int, j: int, vector: Vector) -> Vector:
    """``tau_{i,j} = t_i t_j + 2 sum_{k<j} (-1)^k t_{i+k} t_{j-k} + (-1)^j t_{i+j}``, j > 0: Kresch and Tamvakis (2004)."""
    if j == 0:
        return s(i)(vector)
    sums = [(2 * (-1) ** k, 0, s(i + k)(s(j - k)(vector))) for k in range(1, j)]
    return combine((1, 0, s(i)(s(j)(vector))), *sums, ((-1) ** j, 0, s(i + j)(vector)))


def pfaffian(pair: Callable[[int, int, Vector], Vector], shape: tuple[int, ...], vector: Vector) -> Vector:
    """The class of a strict partition as the Pfaffian of classes of two rows, expanded by the first row."""
    if not shape:
        return vector
    rows = shape if len(shape) % 2 == 0 else (*shape, 0)
    return combine(
        *(
            ((-1) ** (j + 1), 0, pair(rows[0], rows[j], pfaffian(pair, rows[1:j] + rows[j + 1 :], vector)))
            for j in range(1, len(rows))
        )
    )
