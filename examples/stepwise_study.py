"""How many steps to let a gas charge down in: stepwise against quasi-static (invented scenario).

A 50-litre cylinder of nitrogen at a works that does not exist is let down from 60 bar to 6 bar in a
water bath, pushing a piston against loads that are taken off one by one.  How much of the work of
a slow expansion do n steps give, under which equation of state, and how does the loss fall with n?

Stored pressure hurts people: an account of work, not a design; local codes and licensed practice
decide.
"""

from __future__ import annotations

import lostwork as lw

STEPS = (1, 2, 3, 5, 10, 20, 50, 100)
BACKENDS = ("ideal-gas", "cubic", "coolprop")


def study(backend: str) -> None:
    """Print the work of n steps beside that of the quasi-static expansion."""
    site = lw.Surroundings(T="12 degC", p="1.01 bar")
    gas = lw.Fluid("nitrogen", backend=backend)
    start = gas.state(T="12 degC", p="60 bar")
    charge = lw.Content(start, mass="50 L")
    slow = lw.Path.quasi_static(start, held="T", until={"p": "6 bar"})
    best = -(slow.work * charge.mass).to("kJ").magnitude
    print(f"\n{backend}: {charge.mass.magnitude:.3f} kg, quasi-static work {best:.1f} kJ")
    print("steps     work, equal ratios      work, equal decrements     work lost, equal ratios")
    print("              kJ     of best             kJ     of best             kJ   times steps")
    for steps in STEPS:
        ratio, even = (
            lw.Path.stepwise(start, p_end="6 bar", steps=steps, spacing=spacing, held="T")
            for spacing in ("ratio", "decrement")
        )
        given = [-(path.work * charge.mass).to("kJ").magnitude for path in (ratio, even)]
        lost = ratio.balance(site, mass=charge.mass).work_lost.to("kJ").magnitude
        print(
            f"{steps:5d}  {given[0]:10.1f}  {given[0] / best:9.1%}  {given[1]:13.1f}"
            f"  {given[1] / best:9.1%}  {lost:13.2f}  {lost * steps:12.1f}"
        )


def main() -> None:
    """Run the study under three equations of state."""
    for backend in BACKENDS:
        study(backend)
    print("\nThe last column settles: the loss falls as one over the number of steps.")


if __name__ == "__main__":
    main()
