"""What the exergy of a charge is for: spent on work, or gained from it."""

from __future__ import annotations

import numpy as np

from lostwork import Balance, Column, Purpose, State

__all__ = ["charge_exergy_rise", "from_heat", "given_by_expansion", "taken_by_compression"]


def charge_exergy_rise(balance: Balance) -> Column | None:
    """Exergy of the contents after less that before, J; ``None`` where one has no dead state."""
    if balance.exergy_basis != "dead state":
        return None
    rise: Column = 0.0
    for sign, contents in ((1.0, balance.after), (-1.0, balance.before)):
        for content in contents:
            state = content.state
            if not isinstance(state, State):
                return None
            rise = rise + sign * content.exergy(balance.surroundings).magnitude
    return rise


def from_heat(balance: Balance) -> Column:
    """Exergy that comes with the heat, J: sum of Q (1 - T0 / T_boundary)."""
    T0 = balance.surroundings.si.T
    total: Column = 0.0
    for heat in balance.heat:
        if heat.si is not None:
            total = total + heat.si * (1.0 - T0 / heat.T)
    return total


def given_by_expansion(balance: Balance) -> Purpose | None:
    """Useful work against the exergy that the charge, and heat above ambient, give up."""
    rise = charge_exergy_rise(balance)
    if rise is None:
        return None
    heat = from_heat(balance)
    return _where_both(
        expended=-rise + np.maximum(heat, 0.0),
        recovered=-balance.work_useful.magnitude - np.minimum(heat, 0.0),
        expended_name="exergy of the charge and of heat",
        recovered_name="useful work",
    )


def taken_by_compression(balance: Balance) -> Purpose | None:
    """Exergy gained by the charge, and by bodies heated above ambient, against useful work."""
    rise = charge_exergy_rise(balance)
    if rise is None:
        return None
    heat = from_heat(balance)
    return _where_both(
        expended=balance.work_useful.magnitude + np.maximum(heat, 0.0),
        recovered=rise - np.minimum(heat, 0.0),
        expended_name="useful work",
        recovered_name="exergy of the charge and of heat",
    )


def _where_both(
    *, expended: Column, recovered: Column, expended_name: str, recovered_name: str
) -> Purpose | None:
    """A purpose only where something is spent and something is gained by it."""
    measured = (np.asarray(expended) > 0.0) & (np.asarray(recovered) >= 0.0)
    if not np.any(measured):
        return None
    if not measured.shape:
        return Purpose(expended, recovered, expended_name, recovered_name)
    return Purpose(
        np.where(measured, expended, np.nan),
        np.where(measured, recovered, np.nan),
        expended_name,
        recovered_name,
    )
