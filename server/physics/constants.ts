/** Molar gas constant, J/(mol K) (CODATA 2018, exact). */
export const R_J_molK = 8.314462618

/** Molar mass of water, kg/mol (IAPWS-95). */
export const waterMolarMass_kg_mol = 0.018015268

/** 0 °C on the absolute scale, K (definition). */
export const zeroCelsius_K = 273.15

/** Melting point of air-free pure water at 101 325 Pa, °C (IAPWS R10-06(2009) with G12-15). */
export const pureMelting_C = 0.0025193

/** Heat of fusion of pure water at its melting point, kJ/kg (IAPWS R10-06(2009) with G12-15). */
export const pureFusion_kJ_kg = 333.4265

/**
 * The coldest liquid of this model, °C. IAPWS G12-15 ends at the line of homogeneous nucleation,
 * −38 °C at 0.1 MPa, is smooth to −40 and stops being physical below −42: its heat capacity runs
 * away to 8.6 kJ/(kg K) there.
 */
export const coldestLiquid_C = -40

/**
 * The warmest liquid of this model, °C. The correlations were fitted to 30 °C; at 60 °C the
 * enthalpy from 0 °C is still within 0.5 % of IAPWS-95.
 */
export const warmest_C = 60

/** The coldest frozen product of this model, °C: a dewar. Colder, its curve goes straight on. */
export const coldestFrozen_C = -200
