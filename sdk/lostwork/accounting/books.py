"""The arithmetic of a balance, in SI floats or arrays: the only place where sigma is derived.

    mass      dm = sum(m)_in - sum(m)_out - (m_after - m_before)
    energy    dE = sum(m (h + e))_in - sum(m (h + e))_out + sum(Q) + sum(W) - (E_after - E_before)
    entropy   sigma = (S_after - S_before) + sum(m s)_out - sum(m s)_in - sum(Q / T_boundary)

(Bejan, Advanced Engineering Thermodynamics, ch. 1 to 3.)
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lostwork.accounting.conservation import Conservation, check_datums, conservation
from lostwork.accounting.entries import Entries, Entry, known, summed
from lostwork.accounting.flows import Content, Stream
from lostwork.accounting.unknowns import solve_energy
from lostwork.accounting.zero import Zero
from lostwork.properties.backend import Column, R
from lostwork.properties.state import Matter, State

__all__ = ["Books", "keep_books"]

_ROUND_OFF = 1e-12
_TYPICAL_MOLAR_MASS = 0.029


@dataclass(frozen=True)
class Books:
    """Everything a balance knows in SI; W, W/K when the entries are rates, else J, J/K.

    `noise` is the numerical uncertainty of sigma; `hidden` what the parts of mass and energy that
    do not close could hide of it.
    """

    entries: Entries
    conservation: Conservation
    zero: Zero
    mass_residual: Column
    mass_scale: Column
    energy_residual: Column
    energy_scale: Column
    sigma: Column
    noise: Column
    hidden: Column
    failed: dict[int, str]


def keep_books(name: str, entries: Entries, T0: Column, closing: float) -> Books:
    """Solve the unknown heat or work, if there is one, and derive every residual and sigma.

    Parameters
    ----------
    name
        Of the balance, for messages.
    entries
        With every rate known; one heat or work may be unknown.
    T0
        Temperature of the surroundings, K.
    closing
        Fraction of the flows within which a component counts as conserved.

    Raises
    ------
    IllPosed
        More than one heat or work is unknown.
    DatumMismatch
        h and s of the states are counted from different zeros.
    """
    matter = entries.matter
    check_datums(matter, closing)
    kept = conservation(matter, closing)
    zero = Zero(matter, kept)
    carried = _energy_carried(entries, zero)

    def residual(of: Entries) -> Column:
        return carried + of.heat_total + of.work_total

    entries, solved = solve_energy(name, entries, residual)
    mass_residual = summed(mass for _, mass in matter)
    energy_residual = residual(entries)
    coldest = _coldest(T0, entries)
    # What is left after solving is round-off of the sum itself, not energy unaccounted for.
    unaccounted = 0.0 * energy_residual if solved else energy_residual
    return Books(
        entries=entries,
        conservation=kept,
        zero=zero,
        mass_residual=mass_residual,
        mass_scale=summed(np.abs(mass) for _, mass in matter),
        energy_residual=unaccounted,
        energy_scale=_energy_scale(entries, zero, T0),
        sigma=_entropy_generated(entries, zero),
        noise=_noise(entries, zero, coldest if solved else None),
        hidden=np.abs(unaccounted) / coldest + _hidden_in_mass(matter, mass_residual, zero),
        failed=_failed_rows(matter),
    )


def _entropy_generated(entries: Entries, zero: Zero) -> Column:
    with_matter = summed(mass * zero.s(state) for state, mass in entries.matter)
    return -with_matter - summed(known(q.si) / q.T for q in entries.heat)


def _energy_carried(entries: Entries, zero: Zero) -> Column:
    """Energy that matter brings in, less what it takes out and what is stored."""
    return (
        summed(_stream_energy(s, zero) for s in entries.inflows)
        - summed(_stream_energy(s, zero) for s in entries.outflows)
        + summed(_content_energy(c, zero) for c in entries.before)
        - summed(_content_energy(c, zero) for c in entries.after)
    )


def _stream_energy(stream: Stream, zero: Zero) -> Column:
    return stream.mass_si * (zero.h(stream.state) + stream.si.mechanical)


def _content_energy(content: Content, zero: Zero) -> Column:
    return content.mass_si * (zero.u(content.state) + content.mechanical)


def _energy_scale(entries: Entries, zero: Zero, T0: Column) -> Column:
    """Size of the energies at play, against which a residual is small or not.

    The thermal energy R T0 of the matter is counted in, so that a step in which nothing changes
    has a scale too.
    """
    return (
        summed(np.abs(known(q.si)) for q in entries.heat)
        + summed(np.abs(known(w.si)) for w in entries.work)
        + summed(np.abs(_stream_energy(s, zero)) for s in (*entries.inflows, *entries.outflows))
        + summed(np.abs(_content_energy(c, zero)) for c in (*entries.before, *entries.after))
        + summed(np.abs(mass) * _thermal(state, T0) for state, mass in entries.matter)
    )


def _thermal(state: Matter, T0: Column) -> Column:
    molar_mass = state.fluid.molar_mass_si if isinstance(state, State) else _TYPICAL_MOLAR_MASS
    return R * T0 / molar_mass


def _noise(entries: Entries, zero: Zero, solved_at: Column | None) -> Column:
    """Numerical uncertainty of sigma: the backend's own inconsistency, and round-off.

    A heat or work that was solved from the energy balance takes over the noise of the enthalpies.
    """
    noise = summed(_ROUND_OFF * np.abs(known(q.si)) / q.T for q in entries.heat)
    for state, mass in entries.matter:
        floor: Column = 0.0
        energy: Column = _ROUND_OFF * np.abs(zero.h(state))
        if isinstance(state, State):
            si = state.si
            floor = state.fluid.noise_at(si.T, si.p)
            energy = energy + si.T * floor
        noise = noise + np.abs(mass) * (floor + _ROUND_OFF * np.abs(state.si.s))
        if solved_at is not None:
            noise = noise + np.abs(mass) * energy / solved_at
    return noise


def _hidden_in_mass(matter: list[Entry], mass_residual: Column, zero: Zero) -> Column:
    if not matter:
        return 0.0
    largest: Column = 0.0
    for state, _ in matter:
        largest = np.maximum(largest, np.abs(zero.s(state)))
    return np.abs(mass_residual) * largest


def _coldest(T0: Column, entries: Entries) -> Column:
    coldest: Column = T0
    for q in entries.heat:
        coldest = np.minimum(coldest, q.T)
    return coldest


def _failed_rows(matter: list[Entry]) -> dict[int, str]:
    failed: dict[int, str] = {}
    for state, _ in matter:
        for row, reason in state.failed.items():
            failed.setdefault(row, f"{state.label}: {reason}")
    return failed
