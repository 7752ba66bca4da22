"""The verdict on a step: possible, reversible, impossible, undecided or unbalanced."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Any

import numpy as np
import numpy.typing as npt
import pint

from lostwork.accounting.books import Books
from lostwork.properties.backend import Column
from lostwork.quantities import quantity

__all__ = ["Status", "Verdict", "judge"]


class Status(StrEnum):
    """What can be said of a step."""

    possible = "possible"
    """Entropy is generated, beyond the tolerance."""
    reversible = "reversible"
    """Nothing is generated within the tolerance: the limit of what is possible."""
    impossible = "impossible"
    """Entropy would be destroyed, beyond the tolerance."""
    undecided = "undecided"
    """The uncertainty of the data spans zero, or a state could not be computed."""
    unbalanced = "unbalanced"
    """Mass, components or energy do not close, so nothing is said of the second law."""


_GRAVITY_OF = (
    Status.impossible,
    Status.unbalanced,
    Status.undecided,
    Status.reversible,
    Status.possible,
)


@dataclass(frozen=True)
class Verdict:
    """What the second law says of a step.

    For an array balance `statuses` holds one status a row; `status` is then the gravest.
    """

    statuses: npt.NDArray[np.str_]
    sigma: Column
    tolerance_si: Column
    per_time: bool
    reason: str

    @property
    def status(self) -> Status:
        """The status; the gravest of all rows for an array."""
        present = set(np.unique(self.statuses).tolist())
        return next(status for status in _GRAVITY_OF if status.value in present)

    @property
    def margin(self) -> pint.Quantity[Any]:
        """Distance from the limit: the entropy generated, W/K (or J/K); negative if impossible."""
        return quantity(self.sigma, self._unit)

    @property
    def tolerance(self) -> pint.Quantity[Any]:
        """Band around zero within which nothing is decided, W/K (or J/K)."""
        return quantity(self.tolerance_si, self._unit)

    @property
    def acceptable(self) -> bool:
        """Whether no row is impossible or unbalanced."""
        return self.status not in (Status.impossible, Status.unbalanced)

    def rows(self, status: Status | str) -> tuple[int, ...]:
        """Flat indices of the rows of one status."""
        return tuple(int(i) for i in np.flatnonzero(np.ravel(self.statuses) == str(status)))

    @property
    def _unit(self) -> str:
        return "W/K" if self.per_time else "J/K"

    def __str__(self) -> str:
        return f"{self.status}: {self.reason}"


def judge(books: Books, closing: float, stated_closing: bool) -> Verdict:
    """Pronounce on kept books.

    Parameters
    ----------
    books
        From `keep_books`.
    closing
        Fraction of the flows and energies within which mass and energy count as closed.
    stated_closing
        The caller stated `closing`, as the error of instruments: what it may hide makes a step
        undecided.  Otherwise it is taken as noise of the arithmetic.
    """
    mass_open = np.abs(books.mass_residual) > closing * books.mass_scale
    matter_open = np.asarray(books.conservation.residual) > closing
    energy_open = np.abs(books.energy_residual) > closing * books.energy_scale
    tolerance = books.noise + books.hidden
    sigma = books.sigma
    with np.errstate(invalid="ignore"):
        conditions = np.broadcast_arrays(
            ~np.isfinite(sigma),
            mass_open | matter_open | energy_open,
            np.asarray(sigma < -tolerance),
            np.asarray(sigma > tolerance),
            np.asarray(stated_closing & (books.hidden > books.noise)),
        )
    statuses = np.select(
        conditions,
        [
            Status.undecided.value,
            Status.unbalanced.value,
            Status.impossible.value,
            Status.possible.value,
            Status.undecided.value,
        ],
        default=Status.reversible.value,
    )
    verdict = Verdict(statuses, sigma, tolerance, books.entries.per_time, "")
    return Verdict(
        statuses, sigma, tolerance, books.entries.per_time, _reason(verdict, books, closing)
    )


def _reason(verdict: Verdict, books: Books, closing: float) -> str:
    status = verdict.status
    rows = verdict.rows(status)
    place = ""
    if verdict.statuses.shape:
        listed = ", ".join(str(row) for row in rows[:5]) + (" ..." if len(rows) > 5 else "")
        place = f"{len(rows)} of {verdict.statuses.size} rows ({listed}); row {rows[0]}: "
    return place + _said_of(status, books, verdict, rows[0], closing)


def _said_of(status: Status, books: Books, verdict: Verdict, row: int, closing: float) -> str:
    entropy, mass, energy = ("W/K", "kg/s", "W") if books.entries.per_time else ("J/K", "kg", "J")
    shape = verdict.statuses.shape

    def at(value: Column) -> float:
        return float(np.ravel(np.broadcast_to(value, shape))[row])

    sigma, tolerance = at(verdict.sigma), at(verdict.tolerance_si)
    if status is Status.unbalanced:
        if abs(at(books.mass_residual)) > closing * at(books.mass_scale):
            return (
                f"mass does not close: {at(books.mass_residual):.6g} {mass} of "
                f"{at(books.mass_scale) / 2.0:.6g} {mass} is missing"
            )
        if at(books.conservation.residual) > closing:
            return (
                f"{books.conservation.worst} does not close: "
                f"{100.0 * at(books.conservation.residual):.3g} % of the matter appears or vanishes"
            )
        return (
            f"energy does not close: {at(books.energy_residual):.6g} {energy} comes in and is not "
            "accounted for"
        )
    if status is Status.undecided and not np.isfinite(sigma):
        return books.failed.get(row, "a state could not be computed")
    if status is Status.undecided:
        return (
            f"{sigma:.3g} {entropy} generated is within {tolerance:.3g} {entropy}, which the open "
            "part of mass and energy could hide"
        )
    if status is Status.reversible:
        return f"{sigma:.3g} {entropy} generated is zero within {tolerance:.3g} {entropy}"
    if status is Status.impossible:
        return (
            f"{-sigma:.6g} {entropy} of entropy would have to be destroyed, "
            f"the tolerance being {tolerance:.3g} {entropy}"
        )
    return f"{sigma:.6g} {entropy} of entropy is generated"
