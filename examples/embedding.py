"""A second-law check in a program with properties of its own (the figures are invented)."""

import lostwork as lw

site = lw.Surroundings(T="20 degC", p="1.01 bar")
claim = lw.Balance(
    name="vendor's expander",
    inflows=[lw.Stream(lw.GivenState(h="612.4 kJ/kg", s="6.915 kJ/kg/K"), rate="2.2 kg/s")],
    outflows=[lw.Stream(lw.GivenState(h="441.0 kJ/kg", s="6.871 kJ/kg/K"))],
    work=[lw.Work.unknown("generator")],
    surroundings=site,
)
print(f"{claim.work_total.to('kW'):.1f~P} claimed at the shaft: {claim.verdict}")
