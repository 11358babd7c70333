"""River, hydraulics and powerhouse together: power, energy by month and year, and the ledger."""

from hydroyield.energy.estimate import Estimate, estimate_energy
from hydroyield.energy.scheme import Scheme

__all__ = ["Estimate", "Scheme", "estimate_energy"]
