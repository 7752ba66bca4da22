"""The surroundings: the temperature and pressure at which exergy ends."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pint

from lostwork._shapes import common_shape
from lostwork.errors import PropertyError, StateNotFound
from lostwork.properties.backend import Column
from lostwork.properties.fluid import Fluid
from lostwork.properties.state import DeadState
from lostwork.quantities import PRESSURE, TEMPERATURE, quantity, to_si

__all__ = ["SiSurroundings", "Surroundings"]


@dataclass(frozen=True, slots=True)
class SiSurroundings:
    """T0 (K) and p0 (Pa) as plain floats or arrays."""

    T: Column
    p: Column


class Surroundings:
    """The large, unchanging environment of a step.

    Parameters
    ----------
    T
        Temperature T0; one value, or an array for a sweep.
    p
        Absolute pressure p0; also the barometer for gauge pressures in a case file.

    Raises
    ------
    QuantityError
        A value cannot be read.
    ShapesDiffer
        Arrays of T0 and p0 are of different lengths.
    """

    __slots__ = ("_dead_states", "_si")

    _si: SiSurroundings
    _dead_states: dict[Fluid, DeadState | PropertyError]

    def __init__(self, *, T: Any, p: Any) -> None:
        si = SiSurroundings(_fixed(to_si(T, TEMPERATURE, "T0")), _fixed(to_si(p, PRESSURE, "p0")))
        common_shape("surroundings", (("T0", si.T), ("p0", si.p)))
        object.__setattr__(self, "_si", si)
        object.__setattr__(self, "_dead_states", {})

    def __setattr__(self, name: str, value: object) -> None:
        raise AttributeError(f"Surroundings cannot be changed: {name}")

    def __delattr__(self, name: str) -> None:
        raise AttributeError(f"Surroundings cannot be changed: {name}")

    @property
    def si(self) -> SiSurroundings:
        """T0 and p0 in SI."""
        return self._si

    @property
    def T(self) -> pint.Quantity[Any]:
        """Temperature T0, K."""
        return quantity(self.si.T, "K")

    @property
    def p(self) -> pint.Quantity[Any]:
        """Absolute pressure p0, Pa."""
        return quantity(self.si.p, "Pa")

    def dead_state(self, fluid: Fluid) -> DeadState:
        """Give the fluid at T0 and p0, its restricted dead state; computed once per fluid.

        Raises
        ------
        StateNotFound
            The fluid has no state there: frozen, boiling at just this T0 and p0, or outside its
            model.
        """
        known = self._dead_states
        if fluid not in known:
            known[fluid] = self._computed(fluid)
        found = known[fluid]
        if isinstance(found, PropertyError):
            raise StateNotFound(
                fluid=fluid.name,
                given=f"T0 = {self.si.T} K and p0 = {self.si.p} Pa",
                reason=f"the dead state cannot be computed; {found}",
            ) from found
        return found

    def _computed(self, fluid: Fluid) -> DeadState | PropertyError:
        try:
            state = fluid.state_si(("T", "p"), self.si.T, self.si.p)
        except PropertyError as error:
            return error
        if state.failed:
            row, reason = next(iter(state.failed.items()))
            return StateNotFound(fluid=fluid.name, given=f"row {row}", reason=reason)
        si = state.si
        return DeadState(T=self.si.T, p=self.si.p, v=si.v, h=si.h, s=si.s)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Surroundings):
            return NotImplemented
        return self is other or (
            np.array_equal(self.si.T, other.si.T) and np.array_equal(self.si.p, other.si.p)
        )

    def __hash__(self) -> int:
        return hash((np.asarray(self.si.T).tobytes(), np.asarray(self.si.p).tobytes()))

    def __reduce__(self) -> tuple[Any, ...]:
        return _restored, (self.si.T, self.si.p)

    def __repr__(self) -> str:
        return f"Surroundings(T='{self.si.T} K', p='{self.si.p} Pa')"


def _fixed(value: Column) -> Column:
    """Give a float as it is; make an array read-only, for results are cached by it."""
    if isinstance(value, np.ndarray):
        value.flags.writeable = False
    return value


def _restored(T: Column, p: Column) -> Surroundings:
    return Surroundings(T=quantity(T, "K"), p=quantity(p, "Pa"))
