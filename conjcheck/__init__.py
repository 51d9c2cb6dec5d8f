"""conjcheck tests candidate rules for the quantum cohomology of flag varieties against an exact, independent oracle.

Layout: ``geometry`` (spaces, classes, cases) below ``oracle`` (engines) and ``conjecture`` (what a user writes), below ``testing``
(the work) and ``report``; ``pytest_plugin`` is a thin face on top. Public names are imported when first used, so that
``import conjcheck`` costs next to nothing: pytest loads the plug-in everywhere.
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from conjcheck.conjecture.declare import Conjecture as Conjecture
    from conjcheck.conjecture.declare import candidate as candidate
    from conjcheck.conjecture.declare import claim as claim
    from conjcheck.errors import OutsideDomain as OutsideDomain
    from conjcheck.geometry.case import Case as Case
    from conjcheck.geometry.case import Row as Row
    from conjcheck.geometry.families import Adjoint as Adjoint
    from conjcheck.geometry.families import Cominuscule as Cominuscule
    from conjcheck.geometry.families import CompleteFlags as CompleteFlags
    from conjcheck.geometry.families import Family as Family
    from conjcheck.geometry.families import Grassmannians as Grassmannians
    from conjcheck.geometry.families import HomogeneousSpaces as HomogeneousSpaces
    from conjcheck.geometry.families import IsotropicGrassmannians as IsotropicGrassmannians
    from conjcheck.geometry.families import LagrangianGrassmannians as LagrangianGrassmannians
    from conjcheck.geometry.families import Minuscule as Minuscule
    from conjcheck.geometry.families import OrthogonalGrassmannians as OrthogonalGrassmannians
    from conjcheck.geometry.families import PartialFlags as PartialFlags
    from conjcheck.geometry.families import ProjectiveSpaces as ProjectiveSpaces
    from conjcheck.geometry.families import StepFlags as StepFlags
    from conjcheck.geometry.families import Varieties as Varieties
    from conjcheck.geometry.flag_variety import IG as IG
    from conjcheck.geometry.flag_variety import LG as LG
    from conjcheck.geometry.flag_variety import OG as OG
    from conjcheck.geometry.flag_variety import Fl as Fl
    from conjcheck.geometry.flag_variety import FlagVariety as FlagVariety
    from conjcheck.geometry.flag_variety import Gr as Gr
    from conjcheck.geometry.flag_variety import SchubertClass as SchubertClass
    from conjcheck.geometry.polynomial import RootPolynomial as RootPolynomial
    from conjcheck.geometry.polynomial import simple_roots as simple_roots
    from conjcheck.oracle import Product as Product
    from conjcheck.oracle import constant as constant
    from conjcheck.oracle import product as product
    from conjcheck.oracle import table as table
    from conjcheck.testing.examine import examine as examine
    from conjcheck.testing.sift import sift as sift
    from conjcheck.testing.verdict import survey as survey

_ROOMS = {
    "Adjoint": "geometry.families",
    "Case": "geometry.case",
    "Cominuscule": "geometry.families",
    "CompleteFlags": "geometry.families",
    "Conjecture": "conjecture.declare",
    "Family": "geometry.families",
    "Fl": "geometry.flag_variety",
    "FlagVariety": "geometry.flag_variety",
    "Gr": "geometry.flag_variety",
    "Grassmannians": "geometry.families",
    "HomogeneousSpaces": "geometry.families",
    "IG": "geometry.flag_variety",
    "IsotropicGrassmannians": "geometry.families",
    "LG": "geometry.flag_variety",
    "LagrangianGrassmannians": "geometry.families",
    "Minuscule": "geometry.families",
    "OG": "geometry.flag_variety",
    "OrthogonalGrassmannians": "geometry.families",
    "OutsideDomain": "errors",
    "PartialFlags": "geometry.families",
    "Product": "oracle",
    "ProjectiveSpaces": "geometry.families",
    "Row": "geometry.case",
    "RootPolynomial": "geometry.polynomial",
    "SchubertClass": "geometry.flag_variety",
    "StepFlags": "geometry.families",
    "Varieties": "geometry.families",
    "candidate": "conjecture.declare",
    "claim": "conjecture.declare",
    "constant": "oracle",
    "examine": "testing.examine",
    "product": "oracle",
    "sift": "testing.sift",
    "simple_roots": "geometry.polynomial",
    "survey": "testing.verdict",
    "table": "oracle",
}

__all__ = sorted(_ROOMS)  # noqa: PLE0605  # one list of public names, not two
__version__ = "0.1.0"


def __getattr__(name: str) -> Any:
    """Import a public name when it is first used."""
    if name not in _ROOMS:
        from difflib import get_close_matches

        close = get_close_matches(name, _ROOMS, n=1)
        hint = f"; did you mean {close[0]!r}?" if close else ""
        raise AttributeError(f"module 'conjcheck' has no attribute {name!r}{hint}", name=name)
    value = getattr(import_module(f"conjcheck.{_ROOMS[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
