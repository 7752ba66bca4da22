"""What our own layer costs over the bare library doing the same work, in one run.

    python tests/benchmarks/against_the_bare_library.py

CoolProp: a loop over one low-level object that is updated and read into arrays.  Ideal gas: the
same heat-capacity correlation in bare numpy.  Start-up: fresh interpreters with their byte code
cached.  Both sides are timed in turn, and the best of several is taken: other work on the machine
only ever adds time.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable

import CoolProp
import numpy as np

import lostwork as lw

MANY = 10_000
REPEATS = 7


def best_of(*runs: Callable[[], object], repeats: int = REPEATS) -> list[float]:
    """Give the shortest time of each, s, taken in turn."""
    times = [[] for _ in runs]
    for _ in range(repeats):
        for run, taken in zip(runs, times, strict=True):
            begun = time.perf_counter()
            run()
            taken.append(time.perf_counter() - begun)
    return [min(taken) for taken in times]


def many_times(run: Callable[[], object], count: int = 200) -> Callable[[], None]:
    """Repeat a quick run, so that the clock can see it."""

    def repeated() -> None:
        for _ in range(count):
            run()

    return repeated


def raw_columns(
    raw: CoolProp.AbstractState, inputs: int, x: np.ndarray, y: np.ndarray
) -> np.ndarray:
    """Update one low-level object row by row and read T, p, v, h, s and quality."""
    rows = np.empty((6, len(x)))
    for row in range(len(x)):
        raw.update(inputs, x[row], y[row])
        rows[:, row] = raw.T(), raw.p(), 1.0 / raw.rhomass(), raw.hmass(), raw.smass(), raw.Q()
    return rows


def coolprop_rows() -> list[tuple[str, float, float]]:
    """Give label, time of ours and time of the bare loop."""
    found = []
    for name, T_low, T_high in (("nitrogen", 150.0, 600.0), ("water", 500.0, 900.0)):
        fluid = lw.Fluid(name, backend="coolprop")
        raw = CoolProp.AbstractState("HEOS", name)
        T, p = np.linspace(T_low, T_high, MANY), np.geomspace(1e5, 2e6, MANY)
        si = fluid.state_si(("T", "p"), T, p).si
        bare = raw_columns(raw, CoolProp.PT_INPUTS, p, T)
        pairs = (
            (("T", "p"), T, p, CoolProp.PT_INPUTS, p, T),
            (("p", "h"), p, si.h, CoolProp.HmassP_INPUTS, bare[3], p),
            (("p", "s"), p, si.s, CoolProp.PSmass_INPUTS, p, bare[4]),
        )
        for pair, x, y, inputs, raw_x, raw_y in pairs:
            for count in (1, MANY):
                if count == 1:
                    a, b = float(x[MANY // 2]), float(y[MANY // 2])
                    c, d = raw_x[MANY // 2 : MANY // 2 + 1], raw_y[MANY // 2 : MANY // 2 + 1]
                    runs = (
                        many_times(lambda: fluid.state_si(pair, a, b)),  # noqa: B023
                        many_times(lambda: raw_columns(raw, inputs, c, d)),  # noqa: B023
                    )
                    ours, theirs = (t / 200 for t in best_of(*runs))
                else:
                    runs = (
                        lambda: fluid.state_si(pair, x, y),  # noqa: B023
                        lambda: raw_columns(raw, inputs, raw_x, raw_y),  # noqa: B023
                    )
                    ours, theirs = best_of(*runs, repeats=3)
                found.append((f"CoolProp {name} {pair[0]}, {pair[1]}, {count}", ours, theirs))
    return found


def ideal_gas_rows() -> list[tuple[str, float, float]]:
    """(T, p) to v, h and s over the closed forms of a cubic heat capacity in bare numpy."""
    fluid = lw.Fluid("nitrogen", backend="ideal-gas")
    T, p = np.linspace(250.0, 1500.0, MANY), np.geomspace(1e5, 5e6, MANY)
    a, b, c, d = 28.9, -1.57e-3, 8.08e-6, -2.87e-9
    gas_constant, molar_mass = lw.R, 0.0280134

    def bare() -> tuple[np.ndarray, ...]:
        h = T * (a + T * (b / 2 + T * (c / 3 + T * d / 4))) / molar_mass
        s = a * np.log(T) + T * (b + T * (c / 2 + T * d / 3)) - gas_constant * np.log(p / 1e5)
        return gas_constant * T / (p * molar_mass), h, s / molar_mass

    ours, theirs = best_of(lambda: fluid.state_si(("T", "p"), T, p), bare, repeats=40)
    return [(f"ideal gas T, p, {MANY} over a cubic cp in numpy", ours, theirs)]


def balance_row() -> list[tuple[str, float, float]]:
    """One balance of two given states with its verdict, over the same sums in plain floats."""
    site = lw.Surroundings(T="15 degC", p="1 bar")
    inlet = lw.Stream(lw.GivenState(h="612 kJ/kg", s="6.9 kJ/kg/K"), rate="2 kg/s")
    outlet = lw.Stream(lw.GivenState(h="441 kJ/kg", s="6.95 kJ/kg/K"), rate="2 kg/s")
    work = lw.Work("-342 kW")

    def ours() -> lw.Status:
        balance = lw.Balance(
            name="x", inflows=[inlet], outflows=[outlet], work=[work], surroundings=site
        )
        return balance.verdict.status

    def plain() -> bool:
        energy = 2.0 * (612e3 - 441e3) - 342e3
        sigma = 2.0 * (6950.0 - 6900.0)
        lost, destroyed = 288.15 * sigma, 2.0 * ((612e3 - 441e3) + 288.15 * 50.0) - 342e3
        return abs(energy) < 1.0 and abs(lost - destroyed) < 1.0 and sigma > 0.0

    first, second = best_of(many_times(ours), many_times(plain))
    return [
        ("balance of two streams with its verdict, over plain floats", first / 200, second / 200)
    ]


def start_up_row() -> list[tuple[str, float, float]]:
    """Import of lostwork over that of pint with its registry, in fresh interpreters."""
    with tempfile.TemporaryDirectory() as cache:
        environment = {k: v for k, v in os.environ.items() if k != "PYTHONDONTWRITEBYTECODE"}
        environment["PYTHONPYCACHEPREFIX"] = cache

        def import_of(line: str) -> Callable[[], object]:
            command = [sys.executable, "-c", line]
            return lambda: subprocess.run(command, check=True, env=environment)

        runs = [
            import_of("pass"),
            import_of("import lostwork as lw; lw.Fluid, lw.Balance"),
            import_of("import pint; pint.application_registry.get().meter"),
        ]
        for run in runs:
            run()
        empty, ours, theirs = best_of(*runs, repeats=9)
    return [("import of lostwork, over pint with its registry", ours - empty, theirs - empty)]


def table() -> list[tuple[str, float, float]]:
    """Every row: label, ours and the bare library's time, s."""
    return [*coolprop_rows(), *ideal_gas_rows(), *balance_row(), *start_up_row()]


def main() -> None:
    """Print the table."""
    print(f"{'':58} {'ours':>12} {'bare':>12} {'ratio':>8}")
    for label, ours, theirs in table():
        print(f"{label:58} {ours * 1e6:9.1f} us {theirs * 1e6:9.1f} us {ours / theirs:8.2f}")


if __name__ == "__main__":
    main()
