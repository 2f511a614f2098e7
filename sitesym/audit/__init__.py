"""Audit: whether a measured tensor obeys its crystal, and if not, why not.

The package itself can be called: ``sitesym.audit(tensor, crystal, ...)`` is `audit_tensor`.
"""

import sys
from types import ModuleType

from sitesym.audit.auditing import DEFAULT_NOISE, audit
from sitesym.audit.batch import AuditedRecord, AuditRun, audit_files
from sitesym.audit.crystal_references import CrystalShelf
from sitesym.audit.entry import audit_tensor
from sitesym.audit.frames import Subject
from sitesym.audit.measurement import Layout, Measurement
from sitesym.audit.orders import STANDARD_ORDER, Order, order_text, read_order
from sitesym.audit.result import (
    VERDICTS,
    Ambiguity,
    AuditResult,
    Deviation,
    EntryPair,
    EquivalentAxes,
    IndexFinding,
    Reading,
    Residual,
    Slip,
    TensorSymmetry,
    Turn,
    Verdict,
)

__all__ = [
    "DEFAULT_NOISE",
    "STANDARD_ORDER",
    "VERDICTS",
    "Ambiguity",
    "AuditResult",
    "AuditRun",
    "AuditedRecord",
    "CrystalShelf",
    "Deviation",
    "EntryPair",
    "EquivalentAxes",
    "IndexFinding",
    "Layout",
    "Measurement",
    "Order",
    "Reading",
    "Residual",
    "Slip",
    "Subject",
    "TensorSymmetry",
    "Turn",
    "Verdict",
    "audit",
    "audit_files",
    "audit_tensor",
    "order_text",
    "read_order",
]


class _CallablePackage(ModuleType):
    """A package that answers a call, because its name is that of the job it does."""

    __call__ = staticmethod(audit_tensor)


sys.modules[__name__].__class__ = _CallablePackage
