"""A discharge record and its river in the rows of a page, for people."""

from __future__ import annotations

from hydroyield.quantities import rounded
from hydroyield.record import Receipt, Record
from hydroyield.record.faults import in_lines
from hydroyield.record.lengthening import Lengthened
from hydroyield.river.views import RiverViews
from hydroyield.river.years import MONTH_NAMES, span

Rows = list[tuple[str, ...]]


def receipt_rows(record: Record) -> Rows:
    """(what, value) of how a record was read."""
    receipt = record.receipt
    names = [name.rpartition("/")[2] for name, _ in receipt.files] or [
        receipt.file.rpartition("/")[2]
    ]
    rows: Rows = [
        ("Record", f"{', '.join(names)}; {receipt.first} to {receipt.last}"),
        ("Format of the record", _format(receipt)),
        ("Unit of the record", f"{receipt.unit} (from the {receipt.unit_source})"),
        (
            "Days",
            f"{receipt.days} with a value, {receipt.missing_days} missing; {receipt.rows_used} of "
            f"{receipt.rows_read} rows used",
        ),
    ]
    if receipt.station or receipt.series:
        station = ", ".join(text for text in (receipt.station, receipt.series) if text)
        rows.insert(1, ("Station", station))
    rows += [
        ("Rows dropped", _dropped(kind.reason, kind.count, kind.lines)) for kind in receipt.dropped
    ]
    if receipt.missing_days:
        rows.append(("Missing days by month", missing_by_month(record)))
    if receipt.flags:
        rows.append(("Codes of quality", ", ".join(f"{c}: {n}" for c, n in receipt.flags.items())))
    return rows


def _format(receipt: Receipt) -> str:
    step = receipt.step_minutes
    usual = "daily" if receipt.daily else f"every {step:g} min"
    return f"{receipt.file_format}, {usual}, dates {receipt.date_format}, {receipt.encoding}"


def _dropped(reason: str, count: int, lines: tuple[int, ...]) -> str:
    more = f" and {count - len(lines)} more" if count > len(lines) else ""
    return f"{count} {reason} ({in_lines(lines)}{more})" if lines else f"{count} {reason}"


def missing_by_month(record: Record) -> str:
    """ "January 3, July 31"."""
    counted = zip(MONTH_NAMES, record.missing_by_month, strict=True)
    return ", ".join(f"{month} {days}" for month, days in counted if days)


def reference_rows(reference: Record, found: Lengthened) -> Rows:
    """(what, value) of the reference and its lines."""
    receipt = reference.receipt
    lines = "; ".join(
        f"{line.season}: ln Q = {line.intercept:.3g} + {line.slope:.3g} ln Qref, "
        f"r = {line.correlation:.3f}, {line.pairs} days"
        for line in found.relations
    )
    return [
        ("Reference", f"{receipt.file.rpartition('/')[2]}; {receipt.first} to {receipt.last}"),
        ("Lines (MOVE.1)", lines),
    ]


def river_rows(views: RiverViews) -> Rows:
    """(what, value) of low flow, base flow and storage."""
    low, curve = views.low_flow, views.mass_curve
    index = views.base_flow_index
    rows: Rows = []
    if low is not None:
        rows.append(
            (
                "Seven-day low flow of ten years (7Q10)",
                f"{rounded(low.value)} m3/s from {low.years} years; {low.method}",
            )
        )
    if index is not None:
        rows.append(("Base-flow index", f"{index:.2f}"))
    share = curve.storage / (curve.mean * 365.25 * 86400) if curve.mean > 0 else 0.0
    filled = f"; {curve.filled_days} missing days count as mean" if curve.filled_days else ""
    rows.append(
        (
            "Storage that would even the flow out",
            f"{rounded(curve.storage / 1e6)} million m3, {share:.2f} times the mean annual volume, "
            f"between the tangents at {curve.highest} and {curve.lowest}{filled}",
        )
    )
    return rows


def year_rows(views: RiverViews) -> Rows:
    """(year, mean, wetness, seven-day minimum) of the complete hydrological years."""
    return [
        (
            span(year.year, views.start_month),
            rounded(year.mean),
            f"{100 * year.position:.0f} %",
            "" if year.minimum is None else rounded(year.minimum),
        )
        for year in views.years()
    ]
