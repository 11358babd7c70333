"""The discharge record and its river as plain data, for `result.json`."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import numpy as np

import hydroyield
from hydroyield.jobs import GaugeRecord
from hydroyield.record import Receipt, Record
from hydroyield.record.lengthening import Lengthened
from hydroyield.river.duration import usual_characteristic, usual_exceedances
from hydroyield.river.views import RiverViews


def series_facts(views: RiverViews, location: str) -> dict[str, Any]:
    """What the daily series holds, days filled from a reference among its days."""
    known = np.flatnonzero(~np.isnan(views.discharge))
    first, last = (views.dates[known[k]] for k in (0, -1))
    days = int(known.size)
    return {
        "location": location,
        "first": str(first),
        "last": str(last),
        "days": days,
        "missing_days": int((last - first).astype(np.int64)) + 1 - days,
        "mean_m3s": float(views.valid.mean()),
        "complete_years": [str(year) for year in views.complete_years],
        "filled_days": 0 if views.filled is None else int(views.filled.sum()),
    }


def receipt_facts(record: Record) -> dict[str, Any]:
    """How a record was read."""
    receipt = record.receipt
    return {
        "file": receipt.file,
        "file_format": receipt.file_format,
        "station": receipt.station,
        "series": receipt.series,
        "encoding": receipt.encoding,
        "delimiter": receipt.delimiter,
        "decimal_mark": receipt.decimal_mark,
        "date_format": receipt.date_format,
        "date_column": receipt.date_column,
        "value_column": receipt.value_column,
        "unit": receipt.unit,
        "unit_source": receipt.unit_source,
        "step_minutes": receipt.step_minutes,
        "catchment_area_km2": _km2(receipt),
        "flags": receipt.flags,
        "estimated_share": receipt.estimated_share,
        "rows_read": receipt.rows_read,
        "rows_used": receipt.rows_used,
        "rows_dropped": {kind.reason: kind.count for kind in receipt.dropped},
        "first_lines_dropped": {kind.reason: list(kind.lines) for kind in receipt.dropped},
        "measured": {
            "first": str(receipt.first),
            "last": str(receipt.last),
            "days": receipt.days,
            "missing_days": receipt.missing_days,
            "partial_days": receipt.partial_days,
        },
        "monthly_missing_days": list(record.missing_by_month),
    }


def _km2(receipt: Receipt) -> float | None:
    return None if receipt.catchment_area_m2 is None else receipt.catchment_area_m2 / 1e6


def digests(receipt: Receipt) -> dict[str, str]:
    """{file: SHA-256} of every file of a record."""
    return dict(receipt.files) if receipt.files else {receipt.file: receipt.sha256}


def reference_facts(reference: Record, found: Lengthened) -> dict[str, Any]:
    """What was filled from the reference, and by which lines."""
    return {
        "method": "MOVE.1 on logarithms",
        **receipt_facts(reference),
        "overlap_days": found.overlap,
        "zero_days": found.zero_days,
        "correlation": found.correlation,
        "mean_factor": _finite(found.mean_kept),
        "deviation_factor": _finite(found.deviation_kept),
        "period_mean_m3s": found.reference_in_period,
        "mean_m3s": found.reference_mean,
        "lines": [
            {
                "season": line.season,
                "count": line.pairs,
                "correlation": line.correlation,
                "slope": line.slope,
                "intercept": line.intercept,
            }
            for line in found.relations
        ],
    }


def river_facts(views: RiverViews) -> dict[str, Any]:
    """Low flow, base flow, storage, and how the years lie."""
    low, curve = views.low_flow, views.mass_curve
    return {
        "base_flow_index": views.base_flow_index,
        "seven_day_low_flow_m3s": None if low is None else low.value,
        "low_flow_return_period_years": None if low is None else low.return_period,
        "low_flow_method": None if low is None else low.method,
        "low_flow_count": 0 if low is None else low.years,
        "low_flow_start_month": views.low_flow_start,
        "storage_m3": curve.storage,
        "storage_from": str(curve.highest),
        "storage_to": str(curve.lowest),
        "monthly_mean_m3s": [_finite(float(mean)) for mean in views.monthly_mean],
    }


def gauge_result(gauge: GaugeRecord) -> dict[str, Any]:
    """Everything that `result.json` holds of a record alone."""
    return {
        "format": 1,
        "record": series_facts(gauge.views, "gauge") | receipt_facts(gauge.record),
        "exceedance_discharge_m3s": usual_exceedances(gauge.views.valid),
        "characteristic_discharge_m3s": usual_characteristic(gauge.views.valid),
        "river": river_facts(gauge.views),
        "checks": [asdict(check) for check in gauge.checks],
        "caution": RECORD_CAUTION,
        "provenance": {
            "version": hydroyield.__version__,
            "sha256": digests(gauge.record.receipt),
            "seed": None,
        },
    }


RECORD_CAUTION = (
    "A reading of a record as it was given, not a judgement of the gauge. Ask its keeper about "
    "rating, ice and abstractions before anything is built on it; see SAFETY.md."
)


def _finite(value: float) -> float | None:
    return value if np.isfinite(value) else None
