"""The backend "cubic": opens a pure fluid or a mixture on the equation asked for."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from lostwork import REFERENCE_TEMPERATURE, Backend, FluidSpec, Limits, PropertyModel
from lostwork_plugins.cubic.equation import FORMS, Cubic
from lostwork_plugins.cubic.heat_capacity import IdealGas
from lostwork_plugins.cubic.mixture import MixtureModel
from lostwork_plugins.cubic.options import Options
from lostwork_plugins.cubic.parameters import Parameters, parameters
from lostwork_plugins.cubic.phase import Substance
from lostwork_plugins.cubic.pure import PureModel

__all__ = ["CubicBackend", "reopen"]

P_MAX = 1e8
"""Cubic equations put liquids some per cent wrong; beyond 1,000 bar it is tens."""


class CubicBackend(Backend):
    """Models on the Peng-Robinson and the Soave-Redlich-Kwong equation.

    Options
    -------
    eos : str
        "PR" (the default) or "SRK".
    interaction : mapping
        kij of pairs of components, {("methane", "ethane"): 0.003}; overrides the published ones.
    missing : str
        "note" (the default): a pair without kij stands at 0 and is named in the notes of the model;
        "refuse": such a fluid is not opened.
    """

    def open(self, spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
        """Open a model of a pure fluid or of a mixture."""
        read = Options.read(options, spec.components)
        numbers = parameters(spec, read)
        cubic = Cubic(FORMS[read.eos], numbers)
        ideal = IdealGas(numbers.heat_capacity, REFERENCE_TEMPERATURE)
        substance = Substance(cubic, ideal, numbers.molar_mass)
        limits = _limits(numbers, cubic)
        notes = _notes(spec, numbers, read.eos, limits)
        recipe = (spec, dict(options))
        if len(spec.components) == 1:
            critical = float(numbers.Tc[0]), float(numbers.pc[0])
            return PureModel(substance, critical, limits, notes, recipe)
        return MixtureModel(substance, numbers, limits, notes, recipe)


def reopen(spec: FluidSpec, options: Mapping[str, Any]) -> PropertyModel:
    """Open a model again, in another process."""
    return CubicBackend().open(spec, options)


def _limits(numbers: Parameters, cubic: Cubic) -> Limits:
    """Range of the heat capacity and of alpha; of a mixture down to its first melting point.

    A component of a mixture stays liquid below its own melting point when dissolved, so a mixture
    goes down to the lowest of them; the notes say which components may freeze out before.
    """
    T_min = max(one.T_min for one in numbers.heat_capacity)
    melting = numbers.melting[np.isfinite(numbers.melting)]
    if melting.size:
        T_min = max(T_min, float(melting.min()))
    T_max = min(float(cubic.kink.min()), *(one.T_max for one in numbers.heat_capacity))
    return Limits(
        T_min,
        T_max,
        0.0,
        P_MAX,
        f"{cubic.form.name}, between melting and the end of the heat capacity or of alpha",
    )


def _notes(spec: FluidSpec, numbers: Parameters, eos: str, limits: Limits) -> tuple[str, ...]:
    notes = []
    if numbers.missing_pairs:
        pairs = "; ".join(f"{a} and {b}" for a, b in numbers.missing_pairs)
        notes.append(
            f"No published {eos} interaction parameter, taken as zero: {pairs}. "
            "Equilibrium of polar pairs may be badly wrong"
        )
    freezing = [
        f"{part.name} below {T:.5g} K"
        for part, T in zip(spec.components, numbers.melting, strict=True)
        if limits.T_min < T
    ]
    if freezing:
        notes.append(f"Solids are not modelled: {', '.join(freezing)} may freeze out")
    notes += [
        f"Melting point of {part.name} not known; nothing stops the model there"
        for part, T in zip(spec.components, numbers.melting, strict=True)
        if not np.isfinite(T)
    ]
    return tuple(notes)
