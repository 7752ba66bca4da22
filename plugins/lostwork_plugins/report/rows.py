"""CSV: one row a step, and one for each row of an array, in SI with the unit in the head."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from functools import partial
from typing import Any

import numpy as np

import lostwork as lw

__all__ = ["as_csv"]


def as_csv(subject: lw.Audit | lw.Comparison, presentation: lw.Presentation) -> str:
    """Write an audit, or a comparison, as CSV (RFC 4180); what is not there is an empty cell.

    Steps stand in the order of their loss, rows of an array counted from 0.
    """
    rows = (
        list(_of_comparison(subject))
        if isinstance(subject, lw.Comparison)
        else list(_of_audit(subject))
    )
    text = io.StringIO()
    writer = csv.DictWriter(text, fieldnames=list(rows[0]), lineterminator="\r\n")
    writer.writeheader()
    writer.writerows(rows)
    return text.getvalue()


def _of_audit(audit: lw.Audit) -> Iterator[dict[str, Any]]:
    work, entropy = _units(audit.per_time)
    for ranked in audit.ranking():
        balance = ranked.balance
        places = range(int(np.prod(balance.shape))) if balance.shape else (None,)
        efficiency = balance.efficiency
        for row in places:
            at = partial(_cell, row=row, shape=balance.shape)
            losses = {name: at(part) for name, part in balance.losses_si.items()}
            yield {
                "rank": ranked.rank,
                "step": ranked.name,
                "row": "" if row is None else row,
                f"work lost, {work}": at(balance.work_lost_si),
                f"entropy generated, {entropy}": at(balance.books.sigma),
                f"tolerance, {entropy}": at(balance.verdict.tolerance_si),
                f"work, {work}": at(balance.work_total.magnitude),
                f"heat, {work}": at(balance.heat_total.magnitude),
                "efficiency, 1": at(efficiency),
                "verdict": np.ravel(balance.verdict.statuses)[row or 0],
                "mostly by": ranked.mechanism,
                **{
                    f"by {mechanism}, {work}": losses.get(mechanism, "")
                    for mechanism in audit.losses_si
                },
            }


def _of_comparison(comparison: lw.Comparison) -> Iterator[dict[str, Any]]:
    work, entropy = _units(comparison.per_time)
    for row in comparison.rows():
        yield {
            "step": row["step"],
            "backend": row["backend"],
            f"work lost, {work}": _number(row["work_lost"]),
            f"entropy generated, {entropy}": _number(row["entropy_generated"]),
            "efficiency, 1": _number(row["efficiency"]),
            "verdict": row["verdict"],
            f"spread, {work}": _number(row["spread"]),
            "relative spread, 1": _number(row["relative_spread"]),
            "verdict changes": "yes" if row["verdict_changes"] else "no",
        }


def _units(per_time: bool) -> tuple[str, str]:
    return ("W", "W/K") if per_time else ("J", "J/K")


def _cell(value: Any, row: int | None, shape: tuple[int, ...]) -> Any:
    if value is None or row is None:
        return _number(value)
    return _number(float(np.ravel(np.broadcast_to(value, shape))[row]))


def _number(value: float | None) -> Any:
    return "" if value is None or not np.isfinite(value) else repr(float(value))
