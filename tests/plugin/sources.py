"""Plug-ins for the tests of the pytest plug-in."""

PROJECTIVE = '''
from conjcheck import Varieties, candidate


@candidate(on=Varieties("Gr(1,3)", "Gr(1,4)"))
def {name}(X, u, v):
    """Quantum cohomology of projective space: powers of one class."""
    total = u.length + v.length
    return {{(X.of_length(total % X.n)[0], (total // X.n,)): 1}}
'''
"""A true rule, on two small spaces: laws and survey, 25 rows, 25 cases."""

WRONG = '''
from conjcheck import Varieties, candidate


@candidate(on=Varieties("Gr(1,3)", "Gr(1,4)"), statement="h^n = q")
def {name}(X, u, v, w, d):
    """Right on the plane; in space, h^2 times h^3 is counted twice."""
    right = u.length + v.length == w.length + d[0] * X.n
    return right + (X.n == 4 and (u.length, v.length) == (2, 3))
'''
"""A rule with one fault, at Gr(1,4): (2) * (3) -> (1), q^(1)."""

FAULT = "Gr(1,4): (2) * (3) -> (1), q^(1)"

UNIT = '''
from conjcheck import Varieties, candidate


@candidate(on=Varieties("Fl(4)"), premise=lambda X, u, v: u is X.identity)
def {name}(X, u, v):
    """One times anything is that."""
    return {{(v, (0, 0, 0)): 1}}
'''
"""A true rule on a space that is also probed."""

CLAIM = '''
from conjcheck import Varieties, claim


@claim(on=Varieties("Fl(3)"))
def {name}(X, u, v, N):
    """Products are not zero."""
    return bool(N.product(u, v))
'''
"""A true claim."""
