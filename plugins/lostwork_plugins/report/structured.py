"""JSON: everything in SI, versioned.

The schemas lie beside this module (``audit.schema.json``, ``comparison.schema.json``).  A later
version 1 may add fields; a field that changes its meaning raises the version.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import Any

import numpy as np

import lostwork as lw

__all__ = ["VERSION", "as_json"]

VERSION = 1


def as_json(subject: lw.Audit | lw.Comparison, presentation: lw.Presentation) -> str:
    """Write an audit, or a comparison, as JSON; what is not a finite number is null."""
    content = _comparison(subject) if isinstance(subject, lw.Comparison) else _audit(subject)
    head = {
        "format": f"lostwork-{'comparison' if isinstance(subject, lw.Comparison) else 'audit'}",
        "version": VERSION,
        "lostwork": lw.__version__,
        "title": presentation.title,
        "note": presentation.note,
    }
    return json.dumps({**head, **content}, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def _audit(audit: lw.Audit) -> dict[str, Any]:
    whole = audit.whole
    return {
        "units": _units(audit.per_time),
        "per_time": audit.per_time,
        "surroundings": {
            "T": _plain(audit.surroundings.si.T),
            "p": _plain(audit.surroundings.si.p),
        },
        "status": audit.status.value,
        "acceptable": audit.acceptable,
        "work_lost": _plain(audit.work_lost_si),
        "entropy_generated": _plain(audit.entropy_generated.magnitude),
        "losses": _losses(audit.losses_si),
        "steps": [_step(ranked) for ranked in audit.ranking()],
        "links": [
            {
                "stream": link.name,
                "leaves": link.leaves,
                "enters": link.enters,
                "mismatch": link.mismatch,
            }
            for link in audit.links
        ],
        "findings": [
            {"step": finding.step, "check": finding.check, "text": finding.text}
            for finding in audit.findings
        ],
        "whole": None if whole is None else _balance(whole),
    }


def _step(ranked: lw.Ranked) -> dict[str, Any]:
    balance = ranked.balance
    purpose = balance.purpose
    return {
        "rank": ranked.rank,
        "name": ranked.name,
        "share": _plain(ranked.share),
        "mechanism": ranked.mechanism,
        **_balance(balance),
        "efficiency": _plain(balance.efficiency),
        "purpose": None
        if purpose is None
        else {
            "expended": _plain(purpose.expended),
            "recovered": _plain(purpose.recovered),
            "expended_name": purpose.expended_name,
            "recovered_name": purpose.recovered_name,
        },
        "losses": _losses(balance.losses_si),
    }


def _balance(balance: lw.Balance) -> dict[str, Any]:
    verdict, books = balance.verdict, balance.books
    return {
        "verdict": {
            "status": verdict.status.value,
            "reason": verdict.reason,
            "tolerance": _plain(verdict.tolerance_si),
            "statuses": _plain_words(verdict.statuses),
        },
        "shape": list(balance.shape),
        "work_lost": _plain(balance.work_lost_si),
        "entropy_generated": _plain(books.sigma),
        "work": _plain(balance.work_total.magnitude),
        "work_reversible": _plain(balance.work_reversible.magnitude),
        "heat": _plain(balance.heat_total.magnitude),
        "mass_residual": _plain(books.mass_residual),
        "energy_residual": _plain(books.energy_residual),
    }


def _comparison(comparison: lw.Comparison) -> dict[str, Any]:
    return {
        "units": _units(comparison.per_time),
        "per_time": comparison.per_time,
        "backends": list(comparison.backends),
        "acceptable": comparison.acceptable,
        "work_lost": {name: _plain(total) for name, total in comparison.totals.items()},
        "steps": [
            {
                "name": step.name,
                "spread": _plain(step.spread),
                "relative_spread": _plain(step.relative_spread),
                "verdict_changes": step.verdict_changes,
                "figures": {
                    name: {
                        "work_lost": _plain(figures.work_lost),
                        "entropy_generated": _plain(figures.entropy_generated),
                        "efficiency": _plain(figures.efficiency),
                        "verdict": figures.status.value,
                    }
                    for name, figures in step.figures.items()
                },
            }
            for step in comparison.steps
        ],
        "failures": {name: str(error) for name, error in comparison.failures.items()},
    }


def _units(per_time: bool) -> dict[str, str]:
    return {
        "temperature": "K",
        "pressure": "Pa",
        "work": "W" if per_time else "J",
        "entropy": "W/K" if per_time else "J/K",
        "mass": "kg/s" if per_time else "kg",
        "share": "1",
    }


def _losses(losses: Mapping[str, Any]) -> dict[str, Any]:
    return {mechanism: _plain(part) for mechanism, part in losses.items()}


def _plain(value: Any) -> Any:
    """Give a number, a list of numbers as deep as the array, or null."""
    if value is None:
        return None
    array = np.asarray(value, dtype=np.float64)
    if not array.shape:
        number = float(array)
        return number if np.isfinite(number) else None
    return [_plain(entry) for entry in array]


def _plain_words(words: Any) -> Any:
    return np.asarray(words).tolist()
