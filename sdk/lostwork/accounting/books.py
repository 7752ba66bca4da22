"""The arithmetic of a balance, in SI floats or arrays: the only place where sigma is derived.

    mass      dm = sum(m)_in - sum(m)_out - (m_after - m_before)
    energy    dE = sum(m (h + e))_in - sum(m (h + e))_out + sum(Q) + sum(W) - (E_after - E_before)
    entropy   sigma = (S_after - S_before) + sum(m s)_out - sum(m s)_in - sum(Q / T_boundary)
    exergy    X_destroyed = sum(m b)_in - sum(m b)_out + sum(Q (1 - T0 / T_boundary))
                            + W + p0 (V_after - V_before) - (X_after - X_before)

(Bejan, Advanced Engineering Thermodynamics, ch. 1 to 3; Gouy 1889, Stodola 1898 for
X_destroyed = T0 sigma.)  Where fluids of several compositions meet, b includes the Gibbs energy of
each at its dead state, so that mixing and reaction are counted by both routes.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from lostwork.accounting.conservation import Conservation, Entry, check_datums, conservation
from lostwork.accounting.flows import Content, Heat, Stream, Work
from lostwork.accounting.surroundings import Surroundings
from lostwork.errors import IllPosed, InternalDisagreement, PropertyError
from lostwork.properties.backend import Column, R
from lostwork.properties.formation import formation
from lostwork.properties.fluid import Fluid
from lostwork.properties.state import DeadState, Matter, State

__all__ = ["Books", "Exergy", "keep_books"]

_ROUND_OFF = 1e-12
_AGREEMENT = 1e-8
_SOLVED_ENERGY_SHARE = 1e-12


@dataclass(frozen=True)
class Books:
    """Everything a balance knows in SI; W, J/s, W/K when `per_time`, else J, J/K.

    `noise` is the numerical uncertainty of sigma; `hidden` what the parts of mass and energy that
    do not close could hide of it.
    """

    inflows: tuple[Stream, ...]
    outflows: tuple[Stream, ...]
    heat: tuple[Heat, ...]
    work: tuple[Work, ...]
    before: tuple[Content, ...]
    after: tuple[Content, ...]
    per_time: bool
    conservation: Conservation
    mass_residual: Column
    mass_scale: Column
    energy_residual: Column
    energy_scale: Column
    sigma: Column
    noise: Column
    hidden: Column
    failed: dict[int, str]

    @property
    def heat_total(self) -> Column:
        """All heat into the system."""
        return sum(_known(heat.si) for heat in self.heat)

    @property
    def work_total(self) -> Column:
        """All work into the system."""
        return sum(_known(work.si) for work in self.work)

    @property
    def volume_change(self) -> Column:
        """Growth of the volume inside the boundary, m3."""
        return _volume(self.after) - _volume(self.before)


@dataclass(frozen=True)
class Exergy:
    """Exergy destroyed by the exergy balance, and what its flows were counted from."""

    destroyed: Column
    basis: str


def keep_books(
    name: str,
    inflows: Sequence[Stream],
    outflows: Sequence[Stream],
    heat: Sequence[Heat],
    work: Sequence[Work],
    before: Sequence[Content],
    after: Sequence[Content],
    surroundings: Surroundings,
    closing: float,
) -> Books:
    """Solve the unknown, if there is one, and derive every residual and sigma.

    Raises
    ------
    IllPosed
        More than one unknown in mass or in energy, one content without the other, or rates mixed
        with totals.
    DatumMismatch
        h and s of the states are counted from different zeros.
    """
    before, after = tuple(before), tuple(after)
    per_time = _kind(name, inflows, outflows, heat, work, before, after)
    inflows, outflows = _solve_rate(name, tuple(inflows), tuple(outflows), before, after, per_time)
    entries = _entries(inflows, outflows, before, after)
    check_datums(state for state, _ in entries)
    kept = conservation(entries, closing)
    zero = _Zero(entries, kept)
    mass_scale = _sum(np.abs(mass) for _, mass in entries)
    mass_residual = _sum(mass for _, mass in entries)
    stored = _content_energy(before, zero) - _content_energy(after, zero)
    carried = _sum(_stream_energy(stream, zero) for stream in inflows) - _sum(
        _stream_energy(stream, zero) for stream in outflows
    )
    heat, work, solved = _solve_energy(name, tuple(heat), tuple(work), carried + stored, per_time)
    energy_residual = carried + stored + _sum(_known(x.si) for x in (*heat, *work))
    if solved:
        energy_residual = energy_residual * 0.0
    sigma = (
        _content_entropy(after, zero)
        - _content_entropy(before, zero)
        + _sum(s.mass_si * zero.s(s.state) for s in outflows)
        - _sum(s.mass_si * zero.s(s.state) for s in inflows)
        - _sum(_known(q.si) / q.T for q in heat)
    )
    T0 = surroundings.si.T
    energy_scale = _energy_scale(inflows, outflows, heat, work, before, after, zero, T0)
    books = Books(
        inflows=inflows,
        outflows=outflows,
        heat=heat,
        work=work,
        before=before,
        after=after,
        per_time=per_time,
        conservation=kept,
        mass_residual=mass_residual,
        mass_scale=mass_scale,
        energy_residual=energy_residual,
        energy_scale=energy_scale,
        sigma=sigma,
        noise=0.0,
        hidden=0.0,
        failed=_failed_rows(entries),
    )
    coldest = _coldest(T0, heat)
    return replace(
        books,
        noise=_noise(entries, zero, heat, coldest if solved else None),
        hidden=np.abs(energy_residual) / coldest + _hidden_in_mass(books, zero),
    )


def exergy_route(books: Books, surroundings: Surroundings) -> Exergy:
    """Exergy destroyed by the exergy balance, checked against T0 sigma.

    The flows are counted from their dead states.  Where one of them has none (water against frozen
    surroundings, or given h and s), all are counted from the datum instead: in a balance that
    closes, the zero cancels.

    Raises
    ------
    InternalDisagreement
        The two routes differ by more than round-off.
    """
    T0, p0 = surroundings.si.T, surroundings.si.p
    entries = _entries(books.inflows, books.outflows, books.before, books.after)
    zero = _Zero(entries, books.conservation)
    dead = _dead_states(entries, surroundings)

    def flow(state: Matter) -> Column:
        if dead is None or not isinstance(state, State):
            return zero.h(state) - T0 * zero.s(state)
        at_rest, si = dead[state.fluid], state.si
        thermomechanical = (si.h - at_rest.h) - T0 * (si.s - at_rest.s)
        composition = (at_rest.h - zero.h_zero(state)) - T0 * (at_rest.s - zero.s_zero(state))
        return thermomechanical + composition

    def charge(state: Matter) -> Column:
        si = state.si
        return flow(state) - (si.p - p0) * si.v

    with_streams = _sum(
        s.mass_si * (flow(s.state) + s.si.mechanical) for s in books.inflows
    ) - _sum(s.mass_si * (flow(s.state) + s.si.mechanical) for s in books.outflows)
    with_heat = _sum(_known(q.si) * (1.0 - T0 / q.T) for q in books.heat)
    with_work = books.work_total + p0 * books.volume_change
    inside = _sum(
        sign * content.mass_si * (charge(content.state) + content.mechanical)
        for sign, contents in ((1.0, books.before), (-1.0, books.after))
        for content in contents
    )
    destroyed = with_streams + with_heat + with_work + inside
    _agree(destroyed, books, T0)
    return Exergy(destroyed=destroyed, basis="datum" if dead is None else "dead state")


def _agree(destroyed: Column, books: Books, T0: Column) -> None:
    by_entropy = T0 * books.sigma + books.energy_residual
    scale = books.energy_scale + np.abs(T0 * books.sigma)
    with np.errstate(invalid="ignore"):
        apart = np.abs(destroyed - by_entropy) > _AGREEMENT * scale
    if np.any(apart):
        raise InternalDisagreement(
            what="exergy destroyed", first=str(destroyed), second=f"T0 sigma = {by_entropy}"
        )


class _Zero:
    """Where h and s are counted from within one balance, so that no result hangs on the datum.

    One composition: from the first state.  Several that do not react: from each component as an
    ideal gas on the common datum.  Components that react: from the elements, that is, not shifted.
    """

    def __init__(self, entries: list[Entry], kept: Conservation) -> None:
        self._per_component = not kept.one_composition and not kept.reacting
        self._h: Column = 0.0
        self._s: Column = 0.0
        if kept.one_composition and entries:
            first = entries[0][0].si
            self._h, self._s = first.h, first.s

    def h(self, state: Matter) -> Column:
        h: Column = state.si.h - self.h_zero(state)
        return h

    def s(self, state: Matter) -> Column:
        s: Column = state.si.s - self.s_zero(state)
        return s

    def u(self, state: Matter) -> Column:
        u: Column = state.si.u - self.h_zero(state)
        return u

    def h_zero(self, state: Matter) -> Column:
        return self._of_components(state)[0] if self._per_component else self._h

    def s_zero(self, state: Matter) -> Column:
        return self._of_components(state)[1] if self._per_component else self._s

    @staticmethod
    def _of_components(state: Matter) -> tuple[float, float]:
        if not isinstance(state, State):
            return 0.0, 0.0
        spec = state.fluid.spec
        h = s = 0.0
        for component, x in zip(spec.components, spec.mole_fractions, strict=True):
            data = formation(component)
            if data is not None:
                h, s = h + x * data.enthalpy, s + x * data.entropy
        return h / spec.molar_mass, s / spec.molar_mass


def _dead_states(entries: list[Entry], surroundings: Surroundings) -> dict[Fluid, DeadState] | None:
    """Dead state of every fluid in the balance; ``None`` where one has none."""
    dead: dict[Fluid, DeadState] = {}
    for state, _ in entries:
        if not isinstance(state, State):
            return None
        try:
            dead[state.fluid] = surroundings.dead_state(state.fluid)
        except PropertyError:
            return None
    return dead


def _kind(
    name: str,
    inflows: Sequence[Stream],
    outflows: Sequence[Stream],
    heat: Sequence[Heat],
    work: Sequence[Work],
    before: Sequence[Content],
    after: Sequence[Content],
) -> bool:
    """Whether the balance is one of rates; refuse a mixture of rates and totals."""
    kinds = {item.per_time for item in (*inflows, *outflows, *heat, *work)} - {None}
    if before or after:
        kinds.add(False)
    if len(kinds) > 1:
        raise IllPosed(
            balance=name,
            reason="rates (kg/s, kW) and totals (kg, kJ) are mixed; a step with contents before "
            "and after takes totals, streams with mass= instead of rate=",
        )
    if not kinds:
        raise IllPosed(
            balance=name, reason="nothing is known: give a rate, a heat, a work or contents"
        )
    return bool(kinds.pop())


def _solve_rate(
    name: str,
    inflows: tuple[Stream, ...],
    outflows: tuple[Stream, ...],
    before: Sequence[Content],
    after: Sequence[Content],
    per_time: bool,
) -> tuple[tuple[Stream, ...], tuple[Stream, ...]]:
    """Find the one stream without a rate from the mass balance."""
    unknown = [stream for stream in (*inflows, *outflows) if stream.si.mass is None]
    if not unknown:
        return inflows, outflows
    if len(unknown) > 1:
        raise IllPosed(balance=name, reason="more than one stream has no rate")
    known_in = _sum(s.mass_si for s in inflows if s is not unknown[0])
    known_out = _sum(s.mass_si for s in outflows if s is not unknown[0])
    stored = _sum(c.mass_si for c in after) - _sum(c.mass_si for c in before)
    needed = known_in - known_out - stored
    if any(s is unknown[0] for s in inflows):
        needed = -needed
    if np.any(np.asarray(needed) < 0.0):
        raise IllPosed(
            balance=name,
            reason=f"the stream without a rate would have to flow backwards ({needed} kg)",
        )
    found = unknown[0].with_mass(needed, per_time=per_time)

    def put(streams: tuple[Stream, ...]) -> tuple[Stream, ...]:
        return tuple(found if s is unknown[0] else s for s in streams)

    return put(inflows), put(outflows)


def _solve_energy(
    name: str, heat: tuple[Heat, ...], work: tuple[Work, ...], rest: Column, per_time: bool
) -> tuple[tuple[Heat, ...], tuple[Work, ...], bool]:
    """Find the one unknown heat or work from the energy balance."""
    unknown = [item for item in (*heat, *work) if item.si is None]
    if not unknown:
        return heat, work, False
    if len(unknown) > 1:
        raise IllPosed(balance=name, reason="more than one heat or work is unknown")
    needed = -(rest + _sum(x.si for x in (*heat, *work) if x.si is not None))
    found_heat = tuple(
        Heat.from_si(needed, q.T, per_time=per_time, name=q.name) if q.si is None else q
        for q in heat
    )
    found_work = tuple(
        Work.from_si(needed, per_time=per_time, name=w.name) if w.si is None else w for w in work
    )
    return found_heat, found_work, True


def _entries(
    inflows: Sequence[Stream],
    outflows: Sequence[Stream],
    before: Sequence[Content],
    after: Sequence[Content],
) -> list[Entry]:
    entries: list[Entry] = [(s.state, s.mass_si) for s in inflows]
    entries += [(c.state, c.mass_si) for c in before]
    entries += [(s.state, -s.mass_si) for s in outflows]
    entries += [(c.state, -c.mass_si) for c in after]
    return entries


def _stream_energy(stream: Stream, zero: _Zero) -> Column:
    return stream.mass_si * (zero.h(stream.state) + stream.si.mechanical)


def _content_energy(contents: Sequence[Content], zero: _Zero) -> Column:
    return _sum(c.mass_si * (zero.u(c.state) + c.mechanical) for c in contents)


def _content_entropy(contents: Sequence[Content], zero: _Zero) -> Column:
    return _sum(c.mass_si * zero.s(c.state) for c in contents)


def _volume(contents: Sequence[Content]) -> Column:
    return _sum(c.mass_si * c.state.si.v for c in contents)


def _energy_scale(
    inflows: Sequence[Stream],
    outflows: Sequence[Stream],
    heat: Sequence[Heat],
    work: Sequence[Work],
    before: Sequence[Content],
    after: Sequence[Content],
    zero: _Zero,
    T0: Column,
) -> Column:
    """Size of the energies at play, against which a residual is small or not.

    The thermal energy R T0 of the matter is counted in, so that a step in which nothing changes
    has a scale too.
    """
    scale: Column = _sum(np.abs(_known(x.si)) for x in (*heat, *work))
    for stream in (*inflows, *outflows):
        scale = scale + np.abs(_stream_energy(stream, zero))
        scale = scale + stream.mass_si * _thermal(stream.state, T0)
    for content in (*before, *after):
        scale = scale + np.abs(_content_energy((content,), zero))
        scale = scale + content.mass_si * _thermal(content.state, T0)
    return scale


def _thermal(state: Matter, T0: Column) -> Column:
    molar_mass = state.fluid.molar_mass_si if isinstance(state, State) else 0.029
    return R * T0 / molar_mass


def _noise(
    entries: list[Entry], zero: _Zero, heat: Sequence[Heat], solved_at: Column | None
) -> Column:
    """Numerical uncertainty of sigma: the backend's own inconsistency, and round-off."""
    noise: Column = _sum(_ROUND_OFF * np.abs(_known(q.si)) / q.T for q in heat)
    for state, mass in entries:
        floor: Column = 0.0
        energy: Column = _SOLVED_ENERGY_SHARE * np.abs(zero.h(state))
        if isinstance(state, State):
            si = state.si
            floor = state.fluid.noise_at(si.T, si.p)
            energy = energy + si.T * floor
        noise = noise + np.abs(mass) * (floor + _ROUND_OFF * np.abs(state.si.s))
        if solved_at is not None:
            noise = noise + np.abs(mass) * energy / solved_at
    return noise


def _hidden_in_mass(books: Books, zero: _Zero) -> Column:
    entries = _entries(books.inflows, books.outflows, books.before, books.after)
    if not entries:
        return 0.0
    entropies = np.broadcast_arrays(*(np.abs(zero.s(state)) for state, _ in entries))
    largest = np.max(np.stack(entropies), axis=0)
    return np.abs(books.mass_residual) * (largest if largest.shape else float(largest))


def _coldest(T0: Column, heat: Sequence[Heat]) -> Column:
    coldest: Column = T0
    for q in heat:
        coldest = np.minimum(coldest, q.T)
    return coldest


def _failed_rows(entries: list[Entry]) -> dict[int, str]:
    failed: dict[int, str] = {}
    for state, _ in entries:
        for row, reason in state.failed.items():
            failed.setdefault(row, f"{state.label}: {reason}")
    return failed


def _known(value: Column | None) -> Column:
    if value is None:
        raise IllPosed(balance="books", reason="a heat or a work is still unknown")
    return value


def _sum(values: object) -> Column:
    total: Column = 0.0
    for value in values:  # type: ignore[attr-defined]
        total = total + value
    return total
