// Which signs and units does every number in Wavewell use?

/**
 * Time dependence exp(−iωt); k = ω/c is the vacuum wavenumber in 1/length unit. Outgoing waves are H⁽¹⁾, incoming H⁽²⁾.
 * Loss: Im ε > 0; gain: Im ε < 0. Passive poles lie in Im k < 0. Engineers' exp(+jωt) appears only at the edge (files
 * and loss tangents) and is converted there.
 *
 * The scalar problem is ∇·(p∇u) + k²q u = −f with (p, q) = (1/μ, ε), u = E_z for `Ez`, and (1/ε, μ), u = H_z for `Hz`.
 */
export type Polarization = 'Ez' | 'Hz';

/** Which way waves cross the open boundary. */
export type Direction = 'outgoing' | 'incoming';

/** Speed of light in vacuum, m/s (SI, exact). */
export const SPEED_OF_LIGHT = 299792458;

/** Planck constant × c / elementary charge, eV·m (CODATA 2018, exact constants): photon energy = this / wavelength. */
export const ELECTRONVOLT_METRES = (6.62607015e-34 * SPEED_OF_LIGHT) / 1.602176634e-19;

/** Power decibels per neper of power coefficient: 10 log10(e). */
export const DECIBELS_PER_NEPER_POWER = 10 / Math.LN10;
