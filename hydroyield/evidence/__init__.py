"""What supports a result and what speaks against it."""

from hydroyield.evidence.audit import audit

__all__ = ["audit"]
