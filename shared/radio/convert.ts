/** Lengths and waves. */

/** The international foot, exact since 1959. */
const metresPerFoot = 0.3048;
/** Speed of light in vacuum in m/s, exact by the definition of the metre. */
const speedOfLight = 299_792_458;

export function feetToMetres(feet: number): number {
  return feet * metresPerFoot;
}

export function metresToFeet(metres: number): number {
  return metres / metresPerFoot;
}

/** Free-space wavelength in metres of a frequency in kHz. Throws a RangeError unless it is positive. */
export function wavelengthMetres(freqKhz: number): number {
  if (!(freqKhz > 0)) throw new RangeError(`freqKhz must be positive, was ${freqKhz}`);
  return speedOfLight / (freqKhz * 1000);
}

/** A length in wavelengths of a frequency in kHz. */
export function metresToWavelengths(metres: number, freqKhz: number): number {
  return metres / wavelengthMetres(freqKhz);
}
