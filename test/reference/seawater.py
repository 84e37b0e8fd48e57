#!/usr/bin/env python3
"""Freezing and recalescence of seawater by Debian's python3-gsw (TEOS-10).

python3 seawater.py > seawater.json

frazil_properties gives, for a bulk salinity and enthalpy, the ice and the brine that are in
equilibrium: the jump of supercooled seawater. Its temperature is a Conservative one and is turned
into an in-situ one here. Air-free water at sea pressure 0.
"""
import json

import gsw

jumps = []
for SA in [10.0, 35.0, 80.0]:
    for depth in [1.0, 2.0, 4.0]:
        Tf = float(gsw.t_freezing(SA, 0, 0))
        t = round(Tf - depth, 2)
        h = float(gsw.enthalpy_t_exact(SA, t, 0))
        brine, CT, ice = (float(v) for v in gsw.frazil_properties(SA, h, 0))
        jumps.append(
            {
                "salinity_g_kg": SA,
                "freezingPoint_C": Tf,
                "from_C": t,
                "ice_kg_kg": ice,
                "brine_g_kg": brine,
                "conservative_C": CT,
                "end_C": float(gsw.t_from_CT(brine, CT, 0)),
            }
        )
for t in [-3.0, -4.0]:
    h = float(gsw.enthalpy_t_exact(35.0, t, 0))
    brine, CT, ice = (float(v) for v in gsw.frazil_properties(35.0, h, 0))
    jumps.append(
        {
            "salinity_g_kg": 35.0,
            "freezingPoint_C": float(gsw.t_freezing(35.0, 0, 0)),
            "from_C": t,
            "ice_kg_kg": ice,
            "brine_g_kg": brine,
            "conservative_C": CT,
            "end_C": float(gsw.t_from_CT(brine, CT, 0)),
        }
    )
cp = [
    {"salinity_g_kg": SA, "t_C": 0.0, "cp_J_kgK": float(gsw.cp_t_exact(SA, 0.0, 0))}
    for SA in [0.0, 10.0, 35.0, 80.0]
]
print(json.dumps({"gsw": gsw.__version__, "jumps": jumps, "cp": cp}, indent=1))
