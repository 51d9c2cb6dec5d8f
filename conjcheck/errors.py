"""The errors of conjcheck: one small tree, each class a situation, each also the builtin a caller would catch."""

__all__ = [
    "ConjcheckError",
    "DeclarationError",
    "DifferentVarieties",
    "EnginesDisagree",
    "LedgerError",
    "NotIndependent",
    "NotationError",
    "OutOfReach",
    "OutsideDomain",
    "RecordError",
]


class ConjcheckError(Exception):
    """Anything that conjcheck itself reports."""


class NotationError(ConjcheckError, ValueError):
    """A name, permutation, partition, string, word, degree or case that denotes nothing."""


class DifferentVarieties(ConjcheckError, ValueError):
    """Two Schubert classes that should live on one flag variety live on two."""


class OutOfReach(ConjcheckError, RuntimeError):
    """No engine, or not the engine asked for, covers the flag variety."""


class EnginesDisagree(ConjcheckError, AssertionError):
    """Two engines give different values for one product: the oracle must not be trusted until this is understood."""


class DeclarationError(ConjcheckError, TypeError):
    """A ``@candidate`` or ``@claim`` that is declared wrongly."""


class OutsideDomain(ConjcheckError):
    """Raised by a *rule* to say: this case lies outside the domain I am defined on."""


class NotIndependent(ConjcheckError, RuntimeError):
    """The oracle was asked by the very rule it is meant to judge."""


class RecordError(ConjcheckError, ValueError):
    """A record file that cannot be read, or says something it cannot know."""


class LedgerError(ConjcheckError, ValueError):
    """A ledger file that is foreign, damaged or from a later version; it is left untouched."""
