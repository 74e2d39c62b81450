/** Constants of nature, exact since the SI of 2019, and the one temperature that quoted rates refer to. */

/** Boltzmann constant, J/K. */
export const BOLTZMANN = 1.380649e-23
/** Avogadro constant, 1/mol. */
export const AVOGADRO = 6.02214076e23
/** Molar gas constant, J/(mol K). */
export const GAS_CONSTANT = BOLTZMANN * AVOGADRO
/** Stefan-Boltzmann constant, W/(m2 K4). */
export const STEFAN_BOLTZMANN = 5.670374419e-8
/** 0 degrees Celsius in K. */
export const ZERO_CELSIUS_K = 273.15
/** 20 degrees Celsius in K: the gas temperature that outgassing rates and throughputs are usually quoted at. */
export const T20_K = 293.15
/** One standard atmosphere, Pa. */
export const ATMOSPHERE_PA = 101325
