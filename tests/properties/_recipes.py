"""Legal fields for every built-in process type, drawn for one material.

A recipe draws fields by a `Hand`, which gives single values or, for array steps, whole rows.  Legal
means: what a maker or an operator could run.  Heat goes from the hotter to the colder, outlets that
are stated as measured come from a step that could have produced them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from _materials import Material
from hypothesis import assume
from hypothesis import strategies as st

import lostwork as lw

__all__ = ["RECIPES", "Fields", "applicable", "legal_fields", "reshaped", "row_of"]

Fields = dict[str, Any]
Recipe = Callable[["Hand"], Fields]


@dataclass
class Hand:
    """Draws numbers, states, streams and charges of one material."""

    draw: st.DrawFn
    material: Material
    rows: int | None = None
    _count: int = field(default=0)

    def number(self, low: float, high: float, step: float) -> Any:
        """Give a multiple of `step` from `low` to `high`, or one for each row."""
        count = round((high - low) / step)
        drawn = st.integers(0, count).map(lambda n: round(low + n * step, 9))
        if self.rows is None:
            return self.draw(drawn)
        return np.array(self.draw(st.lists(drawn, min_size=self.rows, max_size=self.rows)))

    def one_of(self, *choices: Any) -> Any:
        """Choose; the first is the simplest."""
        return self.draw(st.sampled_from(choices))

    def ratio(self, highest: float = 8.0) -> Any:
        """Ratio of pressures or volumes, from 1 (nothing happens) up."""
        return self.number(1.0, highest, 0.05)

    def rises(self, width: float) -> Any:
        """Temperature differences from 0 to `width`, K."""
        return self.number(0.0, width, 0.5)

    def temperature(self, low: float | None = None, high: float | None = None) -> Any:
        """Temperatures in the region of the material, K."""
        first, last = self.material.T
        low, high = max(first, low or first), min(last, high or last)
        return self.number(low, high, 0.5)

    def pressure(self, low: float | None = None, high: float | None = None) -> Any:
        """Pressures in the region of the material, even on a logarithmic scale, Pa."""
        first, last = self.material.p
        low, high = max(first, low or first), min(last, high or last)
        exponent = self.number(0.0, round(np.log10(high / low), 2), 0.01)
        return np.clip(low * 10.0 ** np.asarray(exponent), low, high)[()]

    def state(self) -> lw.State:
        """Give a state by T and p, or a wet one of a pure fluid by p and quality."""
        fluid = self.material.fluid
        critical = fluid.critical_point
        pure = self.material.two_phases and not self.material.mixture
        if pure and critical is not None and self.one_of(False, False, False, True):
            p = self.pressure(low=self.material.lowest_boiling, high=0.9 * critical.p)
            quality = self.number(0.0, 1.0, 1.0 if self.material.pseudo_pure else 0.05)
            return _existing(fluid, ("p", "quality"), p, quality)
        return _existing(fluid, ("T", "p"), self.temperature(), self.pressure())

    def gas(self) -> lw.State:
        """Give a state in the upper half of the region of temperatures."""
        low, high = self.material.T
        T = self.temperature(low=round(0.5 * (low + high)))
        return _existing(self.material.fluid, ("T", "p"), T, self.pressure())

    def liquid(self) -> lw.State:
        """Give a liquid, cooled below its boiling point."""
        fluid = self.material.fluid
        critical = fluid.critical_point
        ceiling = 0.6 * critical.p if critical is not None else 2e6
        p = self.pressure(low=self.material.lowest_boiling, high=ceiling)
        boiling = _existing(fluid, ("p", "quality"), p, 0.0 * np.asarray(p))
        coldest = max(fluid.limits.T_min + 3.0, self.material.coldest_liquid)
        cooler = np.maximum(boiling.si.T - 1.0 - self.rises(15.0), coldest)
        assume(bool(np.all(cooler <= boiling.si.T - 1.0)))
        return _existing(fluid, ("T", "p"), cooler, p)

    def stream(self, state: lw.State | None = None, **mechanical: Any) -> lw.Stream:
        """Give a stream of 0.1 to 10 kg/s."""
        self._count += 1
        return lw.Stream(
            self.state() if state is None else state,
            rate=lw.quantity(_plain(self.number(0.1, 10.0, 0.1)), "kg/s"),
            name=f"feed {self._count}",
            **mechanical,
        )

    def charge(self, state: lw.State | None = None) -> lw.Content:
        """Give a charge of 0.1 to 10 kg."""
        self._count += 1
        return lw.Content(
            self.state() if state is None else state,
            mass=lw.quantity(_plain(self.number(0.1, 10.0, 0.1)), "kg"),
            name=f"charge {self._count}",
        )


def _existing(fluid: lw.Fluid, pair: lw.Pair, x: Any, y: Any) -> lw.State:
    """Give a state; an example in which the fluid has none (two liquids, say) is not one."""
    try:
        state = fluid.state_si(pair, _plain(x), _plain(y))
    except lw.PropertyError:
        assume(False)
        raise
    assume(not state.failed)
    return state


def _plain(value: Any) -> Any:
    return value if isinstance(value, np.ndarray) and value.shape else float(value)


def _pascal(value: Any) -> Any:
    return lw.quantity(_plain(value), "Pa")


def _kelvin(value: Any) -> Any:
    return lw.quantity(_plain(value), "K")


def _pure(value: Any) -> Any:
    return lw.quantity(_plain(value), "")


def _lowered(hand: Hand, p: Any, highest: float = 8.0) -> Fields:
    """Outlet pressure below `p`, in one of the ways the trade states it."""
    ratio = hand.ratio(highest)
    return hand.one_of(
        {"p_out": _pascal(p / ratio)},
        {"pressure_drop": _pascal(p - p / ratio)},
    )


def _machine(hand: Hand, feed: lw.Stream, sense: float) -> Fields:
    ratio = hand.ratio(5.0)
    fields: Fields = {"inlet": feed}
    p = feed.state.si.p
    fields |= hand.one_of(
        {"pressure_ratio": _pure(ratio)}, {"p_out": _pascal(p * ratio if sense > 0 else p / ratio)}
    )
    efficiency = _pure(hand.number(0.3, 1.0, 0.01))
    fields[hand.one_of("isentropic_efficiency", "polytropic_efficiency")] = efficiency
    if hand.one_of(False, True):
        # Heat leaves a casing that is at most as hot as the coldest fluid inside it.
        fields["heat_loss_fraction"] = _pure(hand.number(0.0, 0.3, 0.01))
        T_in = feed.state.si.T
        cool = T_in if sense > 0 else 0.6 * np.asarray(T_in)
        fields["heat_loss_at"] = _kelvin(cool - hand.rises(40.0))
    if hand.one_of(False, True):
        fields["mechanical_efficiency"] = _pure(hand.number(0.8, 1.0, 0.01))
        fields["mechanical_loss_at"] = _kelvin(hand.number(280.0, 350.0, 0.5))
    return fields


def _throttling(hand: Hand) -> Fields:
    feed = hand.stream()
    return {"inlet": feed, **_lowered(hand, feed.state.si.p, 20.0)}


def _compression(hand: Hand) -> Fields:
    return _machine(hand, hand.stream(), 1.0)


def _expansion(hand: Hand) -> Fields:
    return _machine(hand, hand.stream(), -1.0)


def _pumping(hand: Hand) -> Fields:
    return _machine(hand, hand.stream(hand.liquid()), 1.0)


def _duty(hand: Hand, sense: float) -> Fields:
    feed = hand.stream(hand.gas() if sense < 0 else hand.state())
    fields: Fields = {"inlet": feed, **_lowered(hand, feed.state.si.p, 1.5)}
    T_out = feed.state.si.T + sense * np.asarray(hand.rises(150.0))
    fields["T_out"] = _kelvin(T_out)
    if sense > 0 and hand.one_of(False, True):
        return fields | {"electric": True}
    return fields | {"at": _kelvin(T_out + sense * np.asarray(hand.rises(100.0)))}


def _heating(hand: Hand) -> Fields:
    return _duty(hand, 1.0)


def _cooling(hand: Hand) -> Fields:
    return _duty(hand, -1.0)


def _heat_exchange(hand: Hand) -> Fields:
    hot, cold = hand.gas(), hand.state()
    fields: Fields = {
        "hot": hand.stream(hot),
        "cold": hand.stream(cold),
        "arrangement": hand.one_of("counter", "parallel"),
    }
    for side, state in (("hot", hot), ("cold", cold)):
        if hand.one_of(False, True):
            fields[f"p_out_{side}"] = _pascal(state.si.p / hand.ratio(1.3))
    share = hand.number(0.0, 0.9, 0.01)
    apart = np.asarray(hot.si.T) - cold.si.T
    assume(np.all(apart > 1.0))
    return fields | hand.one_of(
        {"effectiveness": _pure(share)},
        {"T_out_cold": _kelvin(cold.si.T + 0.5 * share * apart)},
        {"T_out_hot": _kelvin(hot.si.T - 0.5 * share * apart)},
        {"minimum_approach": _kelvin((1.0 - share) * apart)},
    )


def _mixing(hand: Hand) -> Fields:
    streams = [hand.stream() for _ in range(hand.one_of(2, 3))]
    if hand.rows is None and not hand.material.pseudo_pure and hand.one_of(False, True):
        other = hand.material.other()
        T, p = 320.0 + hand.rises(200.0), hand.pressure(high=2e6)
        streams.append(hand.stream(other.state_si(("T", "p"), T, _plain(p))))
    lowest = np.minimum.reduce([np.asarray(s.state.si.p) for s in streams])
    fields: Fields = {"inflows": tuple(streams)}
    if hand.one_of(False, True):
        fields["p_out"] = _pascal(lowest / hand.ratio(3.0))
    return fields


def _splitting(hand: Hand) -> Fields:
    share = hand.number(0.0, 1.0, 0.05)
    return {
        "inlet": hand.stream(),
        "fractions": {"one": _pure(share), "other": _pure(1.0 - np.asarray(share))},
    }


def _flash(hand: Hand) -> Fields:
    feed = hand.stream(hand.liquid())
    fields: Fields = {"inlet": feed, **_lowered(hand, feed.state.si.p, 5.0)}
    if hand.one_of(False, True):
        return fields
    T = feed.state.si.T
    if hand.material.mixture:
        rise = hand.rises(40.0)
        return fields | {"T_out": _kelvin(T + rise), "at": _kelvin(T + rise + hand.rises(60.0))}
    quality = hand.number(0.0, 1.0, 1.0 if hand.material.pseudo_pure else 0.05)
    return fields | {"quality_out": _pure(quality), "at": _kelvin(T + 20.0 + hand.rises(60.0))}


def _nozzle(hand: Hand) -> Fields:
    feed = hand.stream(velocity=lw.quantity(_plain(hand.number(0.0, 50.0, 1.0)), "m/s"))
    return {
        "inlet": feed,
        **_lowered(hand, feed.state.si.p, 3.0),
        "isentropic_efficiency": _pure(hand.number(0.5, 1.0, 0.01)),
    }


def _diffuser(hand: Hand) -> Fields:
    feed = hand.stream(velocity=lw.quantity(_plain(hand.number(100.0, 400.0, 5.0)), "m/s"))
    return {
        "inlet": feed,
        "velocity_out": lw.quantity(_plain(hand.number(0.0, 95.0, 1.0)), "m/s"),
        "isentropic_efficiency": _pure(hand.number(0.5, 1.0, 0.01)),
    }


def _pipe(hand: Hand) -> Fields:
    feed = hand.stream(hand.gas(), elevation=lw.quantity(_plain(hand.number(0.0, 40.0, 1.0)), "m"))
    fields: Fields = {"inlet": feed, **_lowered(hand, feed.state.si.p, 2.0)}
    sense = hand.one_of(0.0, 1.0, -1.0)
    if sense == 0.0:
        return fields
    T_out = feed.state.si.T + sense * np.asarray(10.0 + np.asarray(hand.rises(30.0)))
    away = T_out + sense * np.asarray(hand.rises(50.0))
    return fields | {"T_out": _kelvin(T_out), "heat_leak_at": _kelvin(away)}


def _as_measured(hand: Hand) -> Fields:
    """What a step that could run would show: let down, then heated by something hotter."""
    feed = hand.stream()
    first = feed.state
    p = first.si.p / np.asarray(hand.ratio(4.0))
    fallen = first.fluid.state_si(("p", "h"), _plain(p), first.si.h)
    last = first.fluid.state_si(
        ("p", "h"), _plain(p), fallen.si.h + 1e3 * np.asarray(hand.number(0.0, 50.0, 0.5))
    )
    assume(np.all(np.isfinite(last.si.T)))
    hotter = last.si.T + np.asarray(hand.rises(50.0))
    return {
        "inflows": (feed,),
        "outflows": {"outlet": lw.Stream(last)},
        "heat": (lw.Heat.unknown(at=_kelvin(hotter)),),
    }


def _quasi_static(hand: Hand) -> Fields:
    charge = hand.charge()
    held = hand.one_of("T", "s", "p", "v", "polytropic")
    fields: Fields = {"charge": charge, "held": held}
    si = charge.state.si
    ratio = np.asarray(hand.ratio(4.0))
    if hand.one_of(False, True):
        ratio = 1.0 / ratio
    if held in ("T", "s"):
        fields |= hand.one_of(
            {"p_end": _pascal(si.p * ratio)}, {"volume_ratio": _pure(1.0 / ratio)}
        )
    elif held == "p":
        fields |= hand.one_of({"volume_ratio": _pure(ratio)}, {"T_end": _kelvin(si.T * ratio**0.5)})
    elif held == "v":
        fields["p_end"] = _pascal(si.p * ratio**0.5)
    else:
        fields |= {
            "exponent": _pure(hand.one_of(1.0, 1.2, 1.4, 0.5)),
            "volume_ratio": _pure(ratio**0.5),
        }
    if hand.rows is None and held in ("T", "p", "v") and hand.one_of(False, True):
        path = lw.process("quasi-static-path", **fields).path()
        warmth = path.states.si.T
        away = hand.rises(80.0)
        at = np.max(warmth) + away if path.heat.magnitude > 0.0 else np.min(warmth) - away
        fields["heat_at"] = _kelvin(at)
    return fields


def _load(hand: Hand, sense: float) -> tuple[Fields, Any]:
    charge = hand.charge()
    ratio = np.asarray(hand.ratio(5.0))
    p = charge.state.si.p * ratio**sense
    return {"charge": charge, "held": hand.one_of("adiabatic", "T")}, _pascal(p)


def _sudden(sense: float) -> Recipe:
    def fields(hand: Hand) -> Fields:
        common, p = _load(hand, sense)
        return common | {"p_outer": p}

    return fields


def _stepwise(sense: float) -> Recipe:
    def fields(hand: Hand) -> Fields:
        common, p = _load(hand, sense)
        return common | {
            "p_end": p,
            "steps": hand.one_of(1, 2, 5),
            "spacing": hand.one_of("ratio", "decrement"),
        }

    return fields


def _free_expansion(hand: Hand) -> Fields:
    charge = hand.charge()
    ratio = np.asarray(hand.ratio(10.0))
    volume = lw.quantity(_plain(ratio * charge.volume.magnitude), "m^3")
    return {"charge": charge} | hand.one_of({"volume_ratio": _pure(ratio)}, {"volume_end": volume})


def _reservoir_contact(hand: Hand) -> Fields:
    charge = hand.charge()
    T = charge.state.si.T
    reservoir = hand.temperature()
    fields: Fields = {
        "charge": charge,
        "reservoir": _kelvin(reservoir),
        "held": hand.one_of("p", "v"),
    }
    if hand.one_of(False, True):
        share = np.asarray(hand.number(0.0, 1.0, 0.05))
        fields["T_end"] = _kelvin(T + share * (reservoir - T))
    return fields


def _equilibration(hand: Hand) -> Fields:
    fields: Fields = {
        "first": hand.charge(),
        "second": hand.charge(),
        "contact": hand.one_of("joined", "heat"),
        "held": hand.one_of("v", "p"),
    }
    if hand.rows is None and not hand.material.pseudo_pure and hand.one_of(False, True):
        T, p = 320.0 + hand.rises(200.0), hand.pressure(high=2e6)
        fields["second"] = hand.charge(hand.material.other().state_si(("T", "p"), T, _plain(p)))
    return fields


RECIPES: dict[str, Recipe] = {
    "as-measured": _as_measured,
    "compression": _compression,
    "cooling": _cooling,
    "diffuser": _diffuser,
    "equilibration": _equilibration,
    "expansion": _expansion,
    "flash-separation": _flash,
    "free-expansion": _free_expansion,
    "heat-exchange": _heat_exchange,
    "heating": _heating,
    "mixing": _mixing,
    "nozzle": _nozzle,
    "pipe": _pipe,
    "pumping": _pumping,
    "quasi-static-path": _quasi_static,
    "reservoir-contact": _reservoir_contact,
    "splitting": _splitting,
    "stepwise-compression": _stepwise(1.0),
    "stepwise-expansion": _stepwise(-1.0),
    "sudden-compression": _sudden(1.0),
    "sudden-expansion": _sudden(-1.0),
    "throttling": _throttling,
}
"""One recipe for every built-in process type, by its trade name."""


def applicable(kind: str, material: Material) -> bool:
    """Whether a process type can be run with a material at all."""
    if kind == "flash-separation":
        return material.two_phases and not material.pseudo_pure  # which gives no compositions
    return material.two_phases or kind != "pumping"


@st.composite
def legal_fields(
    draw: st.DrawFn, /, *, kind: str, material: Material, rows: int | None = None
) -> Fields:
    """Fields of one step; with `rows`, every number and state is an array of so many rows."""
    try:
        return RECIPES[kind](Hand(draw, material, rows))
    except (lw.PropertyError, lw.PathError, lw.ProcessError):
        assume(False)
        raise


def row_of(value: Any, row: int) -> Any:
    """Take one row out of the fields of an array step."""
    return _each(value, lambda array: np.ravel(array)[row][()])


def reshaped(value: Any, shape: tuple[int, ...]) -> Any:
    """Give the fields of an array step in another shape."""
    return _each(value, lambda array: np.reshape(array, shape))


def _each(value: Any, change: Callable[[Any], Any]) -> Any:
    """Apply a change to every array in fields."""

    def number(entry: Any) -> Any:
        if not np.shape(entry):
            return entry
        changed = change(np.asarray(entry))
        return changed if np.shape(changed) else float(changed)

    if isinstance(value, dict):
        return {name: _each(entry, change) for name, entry in value.items()}
    if isinstance(value, tuple):
        return tuple(_each(entry, change) for entry in value)
    if isinstance(value, lw.State):
        names = ("T", "p", "v", "h", "s", "quality")
        columns = {name: number(getattr(value.si, name)) for name in names}
        return lw.State(value.fluid, type(value.si)(**columns), {})
    if isinstance(value, lw.Stream):
        return lw.Stream.from_si(
            _each(value.state, change),
            None if value.si.mass is None else number(value.si.mass),
            per_time=value.per_time,
            mechanical=number(value.si.mechanical),
            name=value.name,
        )
    if isinstance(value, lw.Content):
        return lw.Content.from_si(
            _each(value.state, change), number(value.mass_si), name=value.name
        )
    if isinstance(value, lw.Heat):
        return lw.Heat.from_si(value.si, number(value.T), per_time=value.per_time, name=value.name)
    if hasattr(value, "magnitude"):
        return lw.quantity(number(value.magnitude), str(value.units))
    return value
