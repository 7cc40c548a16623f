/** Lengths, waves, angles and turns. */

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

/**
 * Height in metres at which a source seen from a distance in metres over flat ground has an elevation angle.
 * Throws a RangeError unless the distance is positive and the angle from 0 up to, not including, 90 degrees.
 */
export function heightMetresAtElevation(distanceMetres: number, elevationDeg: number): number {
  if (!(distanceMetres > 0 && distanceMetres < Infinity)) {
    throw new RangeError(`distanceMetres must be positive, was ${distanceMetres}`);
  }
  if (!(elevationDeg >= 0 && elevationDeg < 90)) {
    throw new RangeError(`elevationDeg must be from 0 to below 90, was ${elevationDeg}`);
  }
  return distanceMetres * Math.tan((elevationDeg * Math.PI) / 180);
}

/** Impedance ratio of an ideal transformer, at least 1: the square of its turns ratio. */
export function impedanceRatio(turns: number, otherTurns: number): number {
  if (!(turns > 0 && turns < Infinity)) throw new RangeError(`turns must be positive, was ${turns}`);
  if (!(otherTurns > 0 && otherTurns < Infinity)) {
    throw new RangeError(`otherTurns must be positive, was ${otherTurns}`);
  }
  return (Math.max(turns, otherTurns) / Math.min(turns, otherTurns)) ** 2;
}
