/**
 * CODATA 2022 recommended values (Mohr, Newell, Taylor, Tiesinga, NIST 2024).
 * e, ħ and kB are exact in the SI of 2019; γe and μ0 are measured.
 */
export const ELEMENTARY_CHARGE = 1.602176634e-19
export const REDUCED_PLANCK = 6.62607015e-34 / (2 * Math.PI)
export const BOLTZMANN = 1.380649e-23
/** |γe|, rad s⁻¹ T⁻¹ */
export const ELECTRON_GYROMAGNETIC_RATIO = 1.76085962784e11
/** μ0, N A⁻² */
export const VACUUM_PERMEABILITY = 1.25663706127e-6
/** γ0 = μ0|γe|, m A⁻¹ s⁻¹ */
export const GAMMA_0 = VACUUM_PERMEABILITY * ELECTRON_GYROMAGNETIC_RATIO
