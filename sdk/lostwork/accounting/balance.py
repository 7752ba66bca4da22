"""The balance: every process ends in one, and every figure of the second law is read off it."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from functools import cached_property
from types import MappingProxyType
from typing import Any, TypeAlias

import numpy as np
import pint

from lostwork.accounting.books import Books, keep_books
from lostwork.accounting.exergy import Exergy, exergy_route
from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.losses import Purpose
from lostwork.accounting.surroundings import Surroundings
from lostwork.accounting.transfers import Heat, Work
from lostwork.accounting.unknowns import collect
from lostwork.accounting.verdict import Status, Verdict, judge
from lostwork.errors import BalanceNotClosed, InternalDisagreement, SecondLawViolation
from lostwork.properties.backend import Column
from lostwork.quantities import FRACTION, quantity, to_si

__all__ = ["Balance"]

Quantity: TypeAlias = "pint.Quantity[Any]"

_DEFAULT_CLOSING = 1e-6


class Balance:
    """Mass, energy, entropy and exergy of one step.

    Parameters
    ----------
    name
        Of the step, for tables and messages.
    inflows, outflows
        Streams; one of them may have no rate, and the mass balance finds it.
    heat, work
        Positive into the system; one heat or work may be unknown, and the energy balance finds it.
    before, after
        A content, or several, for a closed or transient step; amounts are then totals, not rates.
    surroundings
        T0 and p0.
    closing
        Fraction of the flows and energies within which mass and energy count as closed; state it
        for measured data, as the error of the instruments ("1 %").
    mechanisms
        Entropy generated (W/K or J/K, SI) by mechanism, as far as it is known.
    remainder
        The mechanism of whatever `mechanisms` leaves over.
    purpose
        What the step spends and is for, or a function of the balance that tells it.

    Raises
    ------
    IllPosed
        More unknowns than equations, or rates mixed with totals.
    DatumMismatch
        States of different datums.
    ShapesDiffer
        Arrays of different lengths.
    """

    def __init__(
        self,
        *,
        name: str,
        surroundings: Surroundings,
        inflows: Sequence[Stream] = (),
        outflows: Sequence[Stream] = (),
        heat: Sequence[Heat] = (),
        work: Sequence[Work] = (),
        before: Content | Sequence[Content] = (),
        after: Content | Sequence[Content] = (),
        closing: Any = None,
        mechanisms: Mapping[str, Column] | None = None,
        remainder: str = "not attributed",
        purpose: Purpose | Callable[[Balance], Purpose | None] | None = None,
    ) -> None:
        self.name = name
        self.surroundings = surroundings
        self._stated_closing = closing is not None
        self.closing = (
            _DEFAULT_CLOSING if closing is None else float(to_si(closing, FRACTION, "closing"))
        )
        self._mechanisms = dict(mechanisms or {})
        self._remainder = remainder
        self._purpose = purpose
        entries = collect(
            name,
            inflows,
            outflows,
            heat,
            work,
            (before,) if isinstance(before, Content) else before,
            (after,) if isinstance(after, Content) else after,
            surroundings.si,
        )
        self.books: Books = keep_books(name, entries, surroundings.si.T, self.closing)

    @property
    def inflows(self) -> tuple[Stream, ...]:
        """Streams in, every rate known."""
        return self.books.entries.inflows

    @property
    def outflows(self) -> tuple[Stream, ...]:
        """Streams out, every rate known."""
        return self.books.entries.outflows

    @property
    def heat(self) -> tuple[Heat, ...]:
        """Heats, every amount known."""
        return self.books.entries.heat

    @property
    def work(self) -> tuple[Work, ...]:
        """Works, every amount known."""
        return self.books.entries.work

    @property
    def before(self) -> tuple[Content, ...]:
        """Contents before."""
        return self.books.entries.before

    @property
    def after(self) -> tuple[Content, ...]:
        """Contents after."""
        return self.books.entries.after

    @property
    def per_time(self) -> bool:
        """Whether figures are rates (W, W/K) or totals (J, J/K)."""
        return self.books.entries.per_time

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the figures; ``()`` for one point."""
        return np.shape(self.books.sigma)

    @property
    def entropy_generated(self) -> Quantity:
        """Entropy generated inside the boundary, W/K (or J/K)."""
        return quantity(self.books.sigma, "W/K" if self.per_time else "J/K")

    @property
    def work_lost(self) -> Quantity:
        """T0 times the entropy generated, W (or J): what the step could have given more."""
        return quantity(self.work_lost_si, self._energy_unit)

    @property
    def work_lost_si(self) -> Column:
        """Work lost as a plain number."""
        return self.surroundings.si.T * self.books.sigma

    @property
    def exergy_destroyed(self) -> Quantity:
        """Exergy destroyed, by the exergy balance, W (or J).

        Raises
        ------
        InternalDisagreement
            It is not T0 times the entropy generated.
        """
        return quantity(self._exergy.destroyed, self._energy_unit)

    @property
    def exergy_basis(self) -> str:
        """What flow exergies were counted from: "dead state", or "datum" where one has none."""
        return self._exergy.basis

    @property
    def work_total(self) -> Quantity:
        """Actual work, positive into the system, W (or J)."""
        return quantity(self.books.entries.work_total, self._energy_unit)

    @property
    def work_useful(self) -> Quantity:
        """Actual work less what the atmosphere takes part in, positive into the system.

        An expanding content pushes the atmosphere away; p0 dV of its work is of no use to anyone.
        """
        p0 = self.surroundings.si.p
        useful = self.books.entries.work_total + p0 * self.books.entries.volume_change
        return quantity(useful, self._energy_unit)

    @property
    def work_reversible(self) -> Quantity:
        """Work of a reversible step between the same end states, positive into the system.

        Heat is exchanged with the surroundings only beyond what the actual step exchanges.  A
        turbine that gives 4 MW and loses 1 MW has -5 MW here; a compressor that takes 58 kW and
        loses 6 kW has +52 kW.
        """
        return quantity(self.books.entries.work_total - self.work_lost_si, self._energy_unit)

    @property
    def heat_total(self) -> Quantity:
        """All heat, positive into the system, W (or J)."""
        return quantity(self.books.entries.heat_total, self._energy_unit)

    @property
    def mass_residual(self) -> Quantity:
        """Mass in, less mass out, less what is stored, kg/s (or kg)."""
        return quantity(self.books.mass_residual, "kg/s" if self.per_time else "kg")

    @property
    def energy_residual(self) -> Quantity:
        """Energy in, less energy out, less what is stored, W (or J); zero if one was solved."""
        return quantity(self.books.energy_residual, self._energy_unit)

    @cached_property
    def purpose(self) -> Purpose | None:
        """Exergy expended and recovered; ``None`` where the step has no purpose to measure."""
        return self._purpose(self) if callable(self._purpose) else self._purpose

    @property
    def efficiency(self) -> Any:
        """Exergy recovered over exergy expended; ``None`` without a purpose to measure.

        In an array balance the rows without one are NaN.
        """
        purpose = self.purpose
        if purpose is None:
            return None
        with np.errstate(invalid="ignore", divide="ignore"):
            ratio = np.asarray(purpose.recovered, dtype=np.float64) / purpose.expended
        if ratio.shape:
            return np.where(np.isfinite(ratio), ratio, np.nan)
        return float(ratio) if np.isfinite(ratio) else None

    @cached_property
    def losses_si(self) -> Mapping[str, Column]:
        """Work lost by mechanism as plain numbers; the parts sum to `work_lost`."""
        T0 = self.surroundings.si.T
        parts = {name: T0 * sigma for name, sigma in self._mechanisms.items()}
        rest = self.work_lost_si - sum(parts.values()) if parts else self.work_lost_si
        if not parts or np.any(np.abs(rest) > T0 * (self.books.noise + self.books.hidden)):
            parts[self._remainder] = parts.get(self._remainder, 0.0) + rest
        return parts

    @property
    def losses(self) -> Mapping[str, Quantity]:
        """Work lost by mechanism, W (or J)."""
        return MappingProxyType(
            {name: quantity(part, self._energy_unit) for name, part in self.losses_si.items()}
        )

    @cached_property
    def verdict(self) -> Verdict:
        """What the second law says of the step; both routes to the loss are compared first."""
        _ = self._exergy
        return judge(self.books, self.closing, self._stated_closing)

    def require_possible(self) -> Balance:
        """Give the balance itself if it can be, else raise.

        Raises
        ------
        BalanceNotClosed
            Mass, components or energy do not close.
        SecondLawViolation
            Entropy would be destroyed.
        """
        verdict = self.verdict
        if verdict.status is Status.impossible:
            raise SecondLawViolation(balance=self.name, reason=verdict.reason)
        if verdict.status is Status.unbalanced:
            raise BalanceNotClosed(balance=self.name, reason=verdict.reason)
        return self

    @cached_property
    def _exergy(self) -> Exergy:
        try:
            return exergy_route(self.books, self.surroundings)
        except InternalDisagreement as error:
            raise InternalDisagreement(
                what=f"{self.name}, {error.what}", first=error.first, second=error.second
            ) from error

    @property
    def _energy_unit(self) -> str:
        return "W" if self.per_time else "J"

    def __repr__(self) -> str:
        lost = np.asarray(self.work_lost_si)
        figure = f"{float(lost):.6g}" if not lost.shape else f"{lost.shape} rows"
        return f"Balance({self.name!r}: work lost {figure} {self._energy_unit}, {self.verdict})"
