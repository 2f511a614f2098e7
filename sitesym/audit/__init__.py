"""Audit: whether a measured tensor obeys its crystal, and if not, why not."""

from sitesym.audit.auditing import DEFAULT_NOISE, audit, audit_tensor
from sitesym.audit.frames import Subject
from sitesym.audit.measurement import Layout, Measurement
from sitesym.audit.orders import STANDARD_ORDER, Order, order_text, read_order
from sitesym.audit.result import (
    VERDICTS,
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
    "AuditResult",
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
    "audit_tensor",
    "order_text",
    "read_order",
]
