"""Where h and s are counted from within one balance, so that no result hangs on the datum.

Mass that does not quite close would otherwise be multiplied by enthalpies of formation.  A state on
a datum of its own keeps it: what passes through unchanged takes its zero along.
"""

from __future__ import annotations

from lostwork.accounting.conservation import Conservation
from lostwork.accounting.entries import Entry
from lostwork.properties.backend import Column
from lostwork.properties.formation import formation
from lostwork.properties.state import Matter, State

__all__ = ["Zero"]


class Zero:
    """A zero of h and s for the states of one balance.

    One composition: the first state.  Several that do not react: each component as an ideal gas on
    the common datum.  Components that react: the elements, that is, the common datum itself.
    """

    def __init__(self, entries: list[Entry], kept: Conservation) -> None:
        self._per_component = not kept.one_composition and not kept.reacting
        self._h: Column = 0.0
        self._s: Column = 0.0
        if kept.one_composition and entries:
            first = entries[0][0].si
            self._h, self._s = first.h, first.s

    def h(self, state: Matter) -> Column:
        """Enthalpy from this zero, J/kg."""
        h: Column = state.si.h - self.h_zero(state)
        return h

    def s(self, state: Matter) -> Column:
        """Entropy from this zero, J/kg/K."""
        s: Column = state.si.s - self.s_zero(state)
        return s

    def u(self, state: Matter) -> Column:
        """Internal energy from this zero, J/kg."""
        u: Column = state.si.u - self.h_zero(state)
        return u

    def h_zero(self, state: Matter) -> Column:
        """What is taken off h (and u) of a state, J/kg."""
        return _of_components(state)[0] if self._per_component else self._h

    def s_zero(self, state: Matter) -> Column:
        """What is taken off s of a state, J/kg/K."""
        return _of_components(state)[1] if self._per_component else self._s


def _of_components(state: Matter) -> tuple[float, float]:
    if not isinstance(state, State) or not state.datum.is_common:
        return 0.0, 0.0
    spec = state.fluid.spec
    h = s = 0.0
    for component, x in zip(spec.components, spec.mole_fractions, strict=True):
        data = formation(component)
        if data is not None:
            h, s = h + x * data.enthalpy, s + x * data.entropy
    return h / spec.molar_mass, s / spec.molar_mass
