"""One case under several property backends: what moves, and whether a verdict hangs on it."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any, Protocol

import numpy as np

from lostwork.accounting.audit import Audit
from lostwork.accounting.display import display_unit, figure, percent
from lostwork.accounting.verdict import Status
from lostwork.errors import (
    AuditError,
    InternalDisagreement,
    LostworkError,
)

__all__ = ["Auditable", "Comparison", "StepComparison", "StepFigures", "compare"]


class Auditable(Protocol):
    """What can be compared: a `Case`, or anything that audits itself under a backend."""

    @property
    def title(self) -> str:
        """Title for the head of a table."""

    def with_backend(self, backend: str) -> Auditable:
        """Give the same with every fluid behind another backend."""

    def audit(self, progress: Callable[[int, int, str], None] | None = None) -> Audit:
        """Audit it."""


@dataclass(frozen=True)
class StepFigures:
    """One step under one backend; means over the rows of an array, in W and W/K (or J and J/K)."""

    work_lost: float
    entropy_generated: float
    efficiency: float | None
    status: Status


@dataclass(frozen=True)
class StepComparison:
    """One step under every backend that could compute it."""

    name: str
    figures: Mapping[str, StepFigures]

    @property
    def spread(self) -> float:
        """Largest less smallest work lost, W (or J)."""
        lost = [figures.work_lost for figures in self.figures.values()]
        return max(lost) - min(lost)

    @property
    def relative_spread(self) -> float:
        """Spread over the mean size of the work lost; ``nan`` where none is lost."""
        size = float(np.mean([abs(figures.work_lost) for figures in self.figures.values()]))
        return self.spread / size if size > 0.0 else float("nan")

    @property
    def verdict_changes(self) -> bool:
        """Whether the verdict hangs on the backend."""
        return len({figures.status for figures in self.figures.values()}) > 1


class Comparison:
    """Audits of one case under several backends.

    Parameters
    ----------
    title
        Of the case.
    audits
        By backend, in the order asked for.
    failures
        Why the other backends could not compute the case, by backend.

    Raises
    ------
    AuditError
        No audit at all, or audits of different steps.
    """

    def __init__(
        self, title: str, audits: Mapping[str, Audit], failures: Mapping[str, LostworkError]
    ) -> None:
        if not audits:
            reasons = "; ".join(f"{name}: {error}" for name, error in failures.items())
            raise AuditError(
                reason=f"no backend could compute {title!r}: {reasons or 'none given'}"
            )
        self.title = title
        self.audits: Mapping[str, Audit] = MappingProxyType(dict(audits))
        self.failures: Mapping[str, LostworkError] = MappingProxyType(dict(failures))
        self.steps: tuple[StepComparison, ...] = _side_by_side(self.audits)
        self.per_time = next(iter(self.audits.values())).per_time

    @property
    def backends(self) -> tuple[str, ...]:
        """Backends that computed the case."""
        return tuple(self.audits)

    @property
    def changed(self) -> tuple[StepComparison, ...]:
        """Steps whose verdict hangs on the backend."""
        return tuple(step for step in self.steps if step.verdict_changes)

    @property
    def totals(self) -> Mapping[str, float]:
        """Work lost by all steps, W (or J), by backend."""
        return MappingProxyType(
            {name: _mean(audit.work_lost_si) for name, audit in self.audits.items()}
        )

    @property
    def acceptable(self) -> bool:
        """Whether no backend finds a step impossible or unbalanced."""
        return all(audit.acceptable for audit in self.audits.values())

    def rows(self) -> list[dict[str, Any]]:
        """One plain row for each step and backend, in SI, for exporters.

        With the keys step, backend, work_lost, entropy_generated, efficiency, verdict, spread,
        relative_spread, verdict_changes.
        """
        return [
            {
                "step": step.name,
                "backend": backend,
                "work_lost": figures.work_lost,
                "entropy_generated": figures.entropy_generated,
                "efficiency": figures.efficiency,
                "verdict": figures.status.value,
                "spread": step.spread,
                "relative_spread": step.relative_spread,
                "verdict_changes": step.verdict_changes,
            }
            for step in self.steps
            for backend, figures in step.figures.items()
        ]

    def __str__(self) -> str:
        return "\n".join(_as_lines(self))

    def __repr__(self) -> str:
        return f"Comparison({self.title!r}: {', '.join(self.backends)})"


def compare(
    case: Auditable,
    backends: Iterable[str],
    *,
    progress: Callable[[int, int, str], None] | None = None,
) -> Comparison:
    """Audit a case under each of several backends.

    A backend that cannot compute the case (an ideal gas that should condense, a missing library)
    is kept in `Comparison.failures` with its reason.

    Parameters
    ----------
    case
        A `Case`, or anything that audits itself under a backend.
    backends
        Names of installed backends.
    progress
        Called with how many parts are done, how many there are, and what comes next.

    Raises
    ------
    PluginNotFound, PluginClash
        One of the names is none of a backend.
    AuditError
        No backend, one named twice, or none that could compute the case.
    InternalDisagreement
        Two routes to one figure disagree under one of them.
    """
    names = list(backends)
    twice = [name for name in names if names.count(name) > 1]
    if not names or twice:
        reason = f"backend {twice[0]!r} is named twice" if twice else "no backend is named"
        raise AuditError(reason=f"{reason}; expected different backends to compare")
    variants = [(name, case.with_backend(name)) for name in names]
    audits: dict[str, Audit] = {}
    failures: dict[str, LostworkError] = {}
    for name, variant in variants:
        try:
            audits[name] = variant.audit(_told_of(name, progress))
        except InternalDisagreement:
            raise
        except LostworkError as error:
            failures[name] = error
    try:
        return Comparison(case.title, audits, failures)
    except AuditError as error:
        raise error from next(iter(failures.values()), None)


def _told_of(
    backend: str, progress: Callable[[int, int, str], None] | None
) -> Callable[[int, int, str], None] | None:
    if progress is None:
        return None

    def told(done: int, total: int, what: str) -> None:
        progress(done, total, f"{backend}: {what}")

    return told


def _side_by_side(audits: Mapping[str, Audit]) -> tuple[StepComparison, ...]:
    """Put the steps of several audits side by side, in the order of the first."""
    first, *others = audits.values()
    names = [balance.name for balance in first.balances]
    if any({balance.name for balance in audit.balances} != set(names) for audit in others):
        raise AuditError(reason="the audits to compare have different steps")
    figures: dict[str, dict[str, StepFigures]] = {name: {} for name in names}
    for backend, audit in audits.items():
        for ranked in audit.ranking():
            figures[ranked.name][backend] = StepFigures(
                work_lost=ranked.work_lost,
                entropy_generated=_mean(ranked.balance.books.sigma),
                efficiency=ranked.efficiency,
                status=ranked.verdict.status,
            )
    return tuple(StepComparison(name, MappingProxyType(figures[name])) for name in names)


def _as_lines(comparison: Comparison) -> list[str]:
    totals = comparison.totals
    losses = [f.work_lost for step in comparison.steps for f in step.figures.values()]
    size, unit = display_unit([*losses, *totals.values()], comparison.per_time)
    head = ["step", *comparison.backends, "spread %", "verdict"]
    body = [
        [
            step.name,
            *(figure(f.work_lost / size) for f in step.figures.values()),
            percent(step.relative_spread),
            _verdicts(step),
        ]
        for step in comparison.steps
    ]
    total = ["all steps", *(figure(lost / size) for lost in totals.values()), "", ""]
    lines = [f"{comparison.title}: work lost in {unit}, by backend"]
    lines += _aligned([head, *body, total])
    lines += [f"{name} could not compute it: {e}" for name, e in comparison.failures.items()]
    return lines


def _verdicts(step: StepComparison) -> str:
    if step.verdict_changes:
        return ", ".join(f"{f.status} ({name})" for name, f in step.figures.items())
    return next(iter(step.figures.values())).status.value


def _aligned(rows: list[list[str]]) -> list[str]:
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    last = len(widths) - 1

    def cell(text: str, column: int) -> str:
        return text.ljust(widths[column]) if column in (0, last) else text.rjust(widths[column])

    return ["  ".join(cell(t, column) for column, t in enumerate(row)).rstrip() for row in rows]


def _mean(value: Any) -> float:
    array = np.asarray(value, dtype=np.float64)
    known = array[np.isfinite(array)]
    return float(known.mean()) if known.size else float("nan")
