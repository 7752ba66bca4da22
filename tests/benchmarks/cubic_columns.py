"""Columns of the cubic backend over `thermo` point by point, in one run.

    python tests/benchmarks/cubic_columns.py

5,000 states, medians of five; `thermo` is timed on a sample and scaled.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable

import numpy as np
from thermo import PRMIX, CEOSGas, CEOSLiquid, ChemicalConstantsPackage, FlashPureVLS, FlashVL

import lostwork as lw

MANY, SAMPLE = 5_000, 60
GAS = {"methane": 0.7, "ethane": 0.15, "propane": 0.1, "nitrogen": 0.05}


def thermo_flasher(names: list[str], zs: list[float]) -> object:
    """Give the flash of `thermo` for Peng-Robinson without interaction."""
    constants, properties = ChemicalConstantsPackage.from_IDs(names)
    eos = {"Pcs": constants.Pcs, "Tcs": constants.Tcs, "omegas": constants.omegas}
    phases = [
        kind(PRMIX, eos, HeatCapacityGases=properties.HeatCapacityGases, T=300.0, P=1e5, zs=zs)
        for kind in (CEOSGas, CEOSLiquid)
    ]
    if len(names) == 1:
        return FlashPureVLS(constants, properties, gas=phases[0], liquids=[phases[1]], solids=[])
    return FlashVL(constants, properties, gas=phases[0], liquid=phases[1])


def seconds_a_state(run: Callable[[], object], count: int, repeats: int = 5) -> float:
    """Median time of a state."""
    times = []
    for _ in range(repeats):
        begun = time.perf_counter()
        run()
        times.append((time.perf_counter() - begun) / count)
    return statistics.median(times)


def rows() -> list[tuple[str, float, float]]:
    """Label, ours and theirs, s a state."""
    rng = np.random.default_rng(1)
    found = []
    pure = lw.Fluid("propane", backend="cubic")
    mixed = lw.Fluid(GAS, backend="cubic")
    propane = thermo_flasher(["propane"], [1.0])
    gas = thermo_flasher(list(GAS), list(GAS.values()))

    def compare(label, fluid, flasher, pair, x, y, keys):
        shares = [1.0] if flasher is propane else list(GAS.values())
        ours = seconds_a_state(lambda: fluid.state_si(pair, x, y), x.size)
        states = [dict(zip(keys, v, strict=True)) for v in zip(x[:SAMPLE], y[:SAMPLE], strict=True)]

        def theirs():
            for state in states:
                result = flasher.flash(zs=shares, **state)
                _ = result.V(), result.H(), result.S()

        found.append((label, ours, seconds_a_state(theirs, SAMPLE, 3)))

    T, p = rng.uniform(380.0, 700.0, MANY), np.exp(rng.uniform(np.log(1e5), np.log(3e7), MANY))
    compare("pure, one phase, (T, p)", pure, propane, ("T", "p"), T, p, ("T", "P"))
    compare("four components, one phase, (T, p)", mixed, gas, ("T", "p"), T, p, ("T", "P"))
    # Both count h from zeros of their own, so each is asked for states that it has.
    p = np.exp(rng.uniform(np.log(2e5), np.log(3e6), MANY))
    T = rng.uniform(220.0, 450.0, MANY)
    h = pure.state_si(("T", "p"), T, p).si.h
    theirs_h = np.array(
        [propane.flash(T=a, P=b).H() for a, b in zip(T[:SAMPLE], p[:SAMPLE], strict=True)]
    )
    ours = seconds_a_state(lambda: pure.state_si(("p", "h"), p, h), MANY)

    def by_enthalpy():
        for a, b in zip(theirs_h, p[:SAMPLE], strict=True):
            result = propane.flash(H=a, P=b)
            _ = result.T, result.V(), result.S()

    found.append(("pure, all phases, (p, h)", ours, seconds_a_state(by_enthalpy, SAMPLE, 3)))
    T, p = rng.uniform(290.0, 400.0, MANY), np.exp(rng.uniform(np.log(1e5), np.log(4e6), MANY))
    compare("four components, outside the dome, (T, p)", mixed, gas, ("T", "p"), T, p, ("T", "P"))
    T, p = rng.uniform(150.0, 210.0, MANY), np.exp(rng.uniform(np.log(5e5), np.log(2e6), MANY))
    compare("four components, inside the dome, (T, p)", mixed, gas, ("T", "p"), T, p, ("T", "P"))
    return found


def main() -> None:
    """Print the table."""
    print(f"{'':44} {'ours':>10} {'thermo':>12} {'ratio':>8}")
    for label, ours, theirs in rows():
        print(f"{label:44} {ours * 1e6:7.2f} us {theirs * 1e6:9.1f} us {theirs / ours:8.0f}")


if __name__ == "__main__":
    main()
