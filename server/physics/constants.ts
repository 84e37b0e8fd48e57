/** Molar gas constant, J/(mol K): exact since the 2019 SI (CODATA 2018). */
export const R_J_molK = 8.314462618

/** Molar mass of water, kg/mol (IAPWS-95). */
export const waterMolarMass_kg_mol = 0.018015268

/** Boltzmann constant, J/K: exact since the 2019 SI. */
export const boltzmann_J_K = 1.380649e-23

/** 0 °C in kelvin, by definition. */
export const zeroCelsius_K = 273.15

/** Melting point of air-free pure water at 101 325 Pa, °C (IAPWS R10-06(2009) with G12-15). */
export const pureMelting_C = 0.0025193
