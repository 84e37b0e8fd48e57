#!/usr/bin/env python3
"""Water and ice at 101 325 Pa from the IAPWS releases, by Debian's python3-iapws 1.5.2.

python3 water.py > water.json

G12-15 (Holten et al. 2014) gives supercooled water, R10-06(2009) ice, IAPWS-95 water above 0 °C.

_Supercooled of that package returns a Gibbs energy without its factor R T_LL and an enthalpy made
from it: both are made anew here from what it gives right (g as returned, s). Density, heat capacity
and entropy are right as they come.
"""
import json
import math

from iapws import IAPWS95, __version__
from iapws._iapws import _Ice, _Supercooled

P = 0.101325
R_TLL = 0.461523087 * 228.2
R, MW = 8.314462618, 0.018015268


def liquid(T):
    s = _Supercooled(T, P)
    g = s["g"] * R_TLL
    return {"cp": s["cp"], "rho": s["rho"], "s": s["s"], "g": g, "h": g + T * s["s"]}


zero = liquid(273.15)
Tm = 273.152519
rows = []
for t in [0, -0.5, -1, -2, -5, -8, -10, -15, -20, -25, -30, -35, -38]:
    T = 273.15 + t
    l, i = liquid(T), _Ice(T, P)
    dG = l["g"] - i["g"]
    rows.append(
        {
            "t_C": t,
            "liquidCp_kJ_kgK": l["cp"],
            "liquidDensity_kg_m3": l["rho"],
            "liquidEnthalpy_kJ_kg": l["h"] - zero["h"],
            "iceCp_kJ_kgK": i["cp"],
            "iceDensity_kg_m3": i["rho"],
            "fusion_kJ_kg": l["h"] - i["h"],
            "fusionEntropy_kJ_kgK": l["s"] - i["s"],
            "gibbs_J_kg": dG * 1000,
            "osmolality_osmol_kg": dG * 1000 / (R * T),
            "waterActivity": math.exp(-dG * 1000 * MW / (R * T)),
        }
    )
ice = [
    {"t_C": t, "iceCp_kJ_kgK": _Ice(273.15 + t, P)["cp"], "iceDensity_kg_m3": _Ice(273.15 + t, P)["rho"]}
    for t in [-40, -60, -80, -120, -196]
]
at0 = IAPWS95(T=273.16, P=P).h
warm = [
    {
        "t_C": t,
        "liquidCp_kJ_kgK": IAPWS95(T=273.15 + t, P=P).cp,
        "liquidEnthalpyFrom273_16_kJ_kg": IAPWS95(T=273.15 + t, P=P).h - at0,
    }
    for t in [5, 10, 20, 30, 40, 60]
]
print(json.dumps({"iapws": __version__, "meltingPoint_C": Tm - 273.15, "below": rows, "ice": ice, "above": warm}, indent=1))
