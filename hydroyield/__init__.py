"""Annual energy of small run-of-river hydropower sites.

    site = hydroyield.read_site("site.yaml")
    estimate = hydroyield.estimate(site)
    estimate.mean_annual_energy_mwh

The public face loads lazily: nothing heavy is imported before it is used.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from hydroyield.jobs import SiteEstimate, estimate
    from hydroyield.record import Record, read_record
    from hydroyield.site.assembly import read_site
    from hydroyield.site.reading import SiteDescription

__version__ = "0.1.0"

__all__ = [
    "Record",
    "SiteDescription",
    "SiteEstimate",
    "__version__",
    "estimate",
    "read_record",
    "read_site",
]

_HOMES = {
    "Record": "hydroyield.record",
    "SiteDescription": "hydroyield.site.reading",
    "SiteEstimate": "hydroyield.jobs",
    "estimate": "hydroyield.jobs",
    "read_record": "hydroyield.record",
    "read_site": "hydroyield.site.assembly",
}


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module 'hydroyield' has no attribute '{name}'")
    return getattr(import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    return sorted(__all__)
