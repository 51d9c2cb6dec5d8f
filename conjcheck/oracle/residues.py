"""Arithmetic modulo the largest primes below ``2^31``, exact in 63 bits: inverses, products, remainders put together, linear systems."""

from functools import lru_cache
from math import isqrt

import numpy as np

from conjcheck.geometry.weyl import Ints

__all__ = ["inverses", "primes", "put_together", "separating_weights", "solve", "times", "vandermonde"]


@lru_cache
def primes(count: int) -> list[int]:
    """The largest primes below ``2^31``."""
    found: list[int] = []
    p = 2**31 - 1
    while len(found) < count:
        if all(p % t for t in range(3, isqrt(p) + 1, 2)):
            found.append(p)
        p -= 2
    return found


def inverses(values: Ints, p: int) -> Ints:
    """``1 / x`` modulo p, entry by entry; 0 for 0."""
    result, power, exponent = np.ones_like(values), values % p, p - 2
    while exponent:
        if exponent & 1:
            result = result * power % p
        power = power * power % p
        exponent >>= 1
    return result


def times(matrix: Ints, column: Ints, p: int) -> Ints:
    """``matrix @ column`` modulo p, exactly: the column is cut into 15 and 16 bits, so that up to ``2^16`` products fit into 63 bits."""
    high, low = column >> 16, column & 0xFFFF
    result: Ints = (((matrix @ high) % p << 16) + matrix @ low) % p
    return result


def put_together(chosen: list[int], residues: list[int], bound: int) -> int:
    """The number with these residues modulo these primes; it must not exceed the bound of the constant."""
    value, modulus = 0, 1
    for p, residue in zip(chosen, residues, strict=True):
        value += modulus * ((residue - value) * pow(modulus, -1, p) % p)
        modulus *= p
    assert value <= bound, "a residue exceeds the bound: not a structure constant"
    return value


def _master(nodes: list[int], p: int) -> list[int]:
    """The polynomial with these roots modulo p, lowest coefficient first."""
    assert len(set(nodes)) == len(nodes), "the nodes must be distinct; another base point is needed"
    master = [1]
    for node in nodes:
        master = [(a - node * b) % p for a, b in zip([0, *master], [*master, 0], strict=True)]
    return master


def separating_weights(nodes: list[int], j: int, p: int, master: list[int] | None = None) -> list[int]:
    """The ``c_k`` with ``x_j = sum_k c_k values_k`` for the solution x of the Vandermonde system ``sum_j x_j nodes_j^k = values_k``."""
    master, node = master or _master(nodes, p), nodes[j]
    quotient, carry = [0] * len(nodes), 0
    for k in range(len(nodes), 0, -1):
        carry = (master[k] + node * carry) % p
        quotient[k - 1] = carry
    scale = pow(sum(c * pow(node, k, p) for k, c in enumerate(quotient)) % p, -1, p)
    return [c * scale % p for c in quotient]


def vandermonde(nodes: list[int], values: Ints, p: int) -> Ints:
    """Solve ``sum_j x_j nodes_j^k = values_k`` for k = 0, 1, ... modulo p; ``(K, M) -> (K, M)``."""
    master, solution = _master(nodes, p), np.zeros_like(values)
    for j in range(len(nodes)):
        for weight, line in zip(separating_weights(nodes, j, p, master), values, strict=True):
            solution[j] = (solution[j] + weight * line) % p
    return solution


def solve(matrix: Ints, values: Ints, p: int) -> list[int]:
    """Solve a square linear system modulo p; the residues are read between ``-p/2`` and ``p/2``."""
    table = np.concatenate([matrix % p, values[:, None] % p], axis=1)
    size = len(matrix)
    for column in range(size):
        lead = column + int(np.argmax(table[column:, column] != 0))
        table[[column, lead]] = table[[lead, column]]
        table[column] = table[column] * pow(int(table[column, column]), -1, p) % p
        factors = table[:, column].copy()
        factors[column] = 0
        table = (table - factors[:, None] * table[column]) % p
    return [int(x) if x <= p // 2 else int(x) - p for x in table[:, -1]]
