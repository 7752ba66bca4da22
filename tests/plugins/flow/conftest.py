"""Sites and checks that the tests of flow equipment share."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

import lostwork as lw


@pytest.fixture(scope="session")
def site() -> lw.Surroundings:
    return lw.Surroundings(T="298.15 K", p="1.01325 bar")


@pytest.fixture(scope="session")
def constant_air() -> lw.Fluid:
    return lw.Fluid("air", backend="ideal-gas", cp="1005 J/kg/K")


@pytest.fixture(scope="session")
def assert_sound() -> Callable[..., lw.Balance]:
    """Check what must hold of every legal step, and give its balance."""
    return _assert_sound


def _assert_sound(
    step: lw.Process, site: lw.Surroundings, *, slack: float = 1e-9, closing: float = 1e-6
) -> lw.Balance:
    balance = step.balance(site)
    T0 = site.si.T
    throughput = sum(
        np.asarray(s.mass_si) * 8.314 * T0 / s.state.fluid.molar_mass_si
        for s in (*balance.inflows, *balance.outflows)
    )
    scale = throughput + sum(np.abs(x.si) for x in (*balance.heat, *balance.work))
    assert balance.verdict.status in (lw.Status.possible, lw.Status.reversible), balance
    assert np.all(np.abs(balance.mass_residual.magnitude) <= 1e-9 * balance.inflows[0].mass_si)
    assert np.all(np.abs(balance.energy_residual.magnitude) <= closing * scale)
    tolerance = balance.verdict.tolerance_si * T0 + slack * scale
    assert np.all(balance.work_lost_si >= -tolerance)
    assert np.all(
        np.abs(balance.exergy_destroyed.magnitude - balance.work_lost_si) <= closing * scale
    )
    parts = balance.losses_si
    assert set(parts) <= set(lw.MECHANISMS) - {"not attributed"}
    assert np.all(np.abs(sum(parts.values()) - balance.work_lost_si) <= tolerance)
    for name, part in parts.items():
        assert np.all(np.asarray(part) >= -tolerance), (name, part)
    _assert_purpose_closes(step, balance, T0, scale)
    return balance


def _assert_purpose_closes(step: Any, balance: lw.Balance, T0: Any, scale: Any) -> None:
    """Expended less recovered is destroyed, or leaves unused with heat that carries exergy away."""
    purpose = balance.purpose
    if purpose is None:
        return
    unused = 0.0
    if type(step).trade_name not in ("heating", "cooling"):
        unused = -sum(np.minimum(q.si * (1.0 - T0 / q.T), 0.0) for q in balance.heat)
    gap = purpose.expended - purpose.recovered - balance.work_lost_si - unused
    known = np.isfinite(gap)
    assert np.any(known)
    assert np.all(np.abs(gap)[known] <= np.broadcast_to(1e-6 * scale, np.shape(gap))[known])
