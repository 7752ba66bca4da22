"""What must hold of the balance of every legal step, and the books kept again in other ways."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

import lostwork as lw

__all__ = ["assert_same_loss", "assert_sound", "booked_again", "scale_of", "slack_of"]

_ROUND_OFF = 1e-9


def scale_of(balance: lw.Balance) -> Any:
    """Size of the energies at play, W (or J), that no datum can move."""
    T0 = balance.surroundings.si.T
    matter = (*balance.inflows, *balance.outflows, *balance.before, *balance.after)
    thermal = sum(np.abs(m.mass_si) * lw.R * T0 / _molar_mass(m.state) for m in matter)
    transfers = sum(np.abs(x.si) for x in (*balance.heat, *balance.work))
    return thermal + transfers


def slack_of(balance: lw.Balance) -> Any:
    """How far figures of work may miss: the tolerance of the verdict, and round-off, W (or J)."""
    T0 = balance.surroundings.si.T
    return T0 * balance.verdict.tolerance_si + _ROUND_OFF * scale_of(balance)


def assert_sound(balance: lw.Balance) -> None:
    """Check the second law, the work order, both routes, the mechanisms and the efficiency."""
    verdict = balance.verdict
    assert verdict.status in (lw.Status.possible, lw.Status.reversible), str(verdict)
    slack, lost = slack_of(balance), balance.work_lost_si
    assert np.all(balance.entropy_generated.magnitude >= -np.asarray(verdict.tolerance_si))
    work, reversible = balance.work_total.magnitude, balance.work_reversible.magnitude
    assert np.all(reversible <= work + slack), (
        f"reversible work {reversible} above actual work {work} (into the system)"
    )
    destroyed, open_energy = balance.exergy_destroyed.magnitude, balance.energy_residual.magnitude
    assert np.all(np.abs(destroyed - lost) <= slack + np.abs(open_energy)), (
        f"exergy destroyed {destroyed}, T0 sigma {lost}"
    )
    parts = balance.losses_si
    assert set(parts) <= set(lw.MECHANISMS)
    assert np.all(np.abs(sum(parts.values()) - lost) <= slack), f"parts {dict(parts)} of {lost}"
    for mechanism, part in parts.items():
        assert np.all(np.asarray(part) >= -slack), f"{mechanism} loses {part}, slack {slack}"
    _assert_purpose(balance, slack)


def _assert_purpose(balance: lw.Balance, slack: Any) -> None:
    purpose, efficiency = balance.purpose, balance.efficiency
    if purpose is None:
        assert efficiency is None
        return
    spent, gained = np.asarray(purpose.expended), np.asarray(purpose.recovered)
    known = np.isfinite(spent) & np.isfinite(gained)
    assert known.any()
    said = (
        f"{purpose.expended_name} {spent}, {purpose.recovered_name} {gained}, "
        f"lost {balance.work_lost_si}, slack {slack}"
    )
    with np.errstate(invalid="ignore"):
        assert np.all((gained >= -slack) | ~known), f"efficiency below 0: {said}"
        assert np.all((gained <= spent + slack) | ~known), f"efficiency above 1: {said}"
        enough = spent - gained >= balance.work_lost_si - slack - np.abs(
            balance.energy_residual.magnitude
        )
        assert np.all(enough | ~known), f"more is destroyed than goes missing: {said}"


def booked_again(
    balance: lw.Balance,
    matter: Callable[[Any], Any] = lambda state: state,
    *,
    backwards: bool = False,
) -> lw.Balance:
    """Keep the books of a balance again, with its states changed or its entries in other order."""
    turn = -1 if backwards else 1
    return lw.Balance(
        name=balance.name,
        surroundings=balance.surroundings,
        inflows=[s.replaced(state=matter(s.state)) for s in balance.inflows][::turn],
        outflows=[s.replaced(state=matter(s.state)) for s in balance.outflows][::turn],
        heat=balance.heat[::turn],
        work=balance.work[::turn],
        before=[_charge(c, matter) for c in balance.before][::turn],
        after=[_charge(c, matter) for c in balance.after][::turn],
        closing=None,
    )


def assert_same_loss(first: lw.Balance, second: lw.Balance, *, relative: float = 1e-9) -> None:
    """Check that two balances of one step find the same loss and the same verdict."""
    scale = scale_of(first)
    bound = relative * scale + first.surroundings.si.T * np.asarray(
        0.1 * np.asarray(first.verdict.tolerance_si)
    )
    apart = np.abs(first.work_lost_si - np.asarray(second.work_lost_si))
    assert np.all(apart <= bound), f"{first.work_lost_si} against {second.work_lost_si}"
    apart = np.abs(first.exergy_destroyed.magnitude - second.exergy_destroyed.magnitude)
    assert np.all(apart <= bound), f"{first.exergy_destroyed} against {second.exergy_destroyed}"


def _charge(content: lw.Content, matter: Callable[[Any], Any]) -> lw.Content:
    return lw.Content.from_si(
        matter(content.state), content.mass_si, mechanical=content.mechanical, name=content.name
    )


def _molar_mass(state: Any) -> float:
    return state.fluid.molar_mass_si if isinstance(state, lw.State) else 0.029
