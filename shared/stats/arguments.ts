/** Checks shared by all estimators: bad input is refused with the argument's name, never turned into NaN. */

/** A list of numbers: a plain array or a typed one. */
export type Numbers = ArrayLike<number>;

export function requireOpenUnit(name: string, value: number): void {
  if (!(value > 0 && value < 1))
    throw new RangeError(`${name} must lie between 0 and 1 (both excluded), got ${value}`);
}

export function requireUnit(name: string, value: number): void {
  if (!(value >= 0 && value <= 1)) throw new RangeError(`${name} must lie between 0 and 1, got ${value}`);
}

export function requirePositive(name: string, value: number): void {
  if (!(value > 0 && value < Infinity))
    throw new RangeError(`${name} must be a positive number, got ${value}`);
}

export function requireFinite(name: string, value: number): void {
  if (!Number.isFinite(value)) throw new RangeError(`${name} must be a finite number, got ${value}`);
}

export function requireCount(name: string, value: number): void {
  if (!Number.isSafeInteger(value) || value < 0) {
    throw new RangeError(`${name} must be a whole number from 0 up, got ${value}`);
  }
}

/** Every entry finite, and at least `minimum` of them. */
export function requireNumbers(name: string, values: Numbers, minimum = 1): void {
  if (values.length < minimum) {
    throw new RangeError(
      `${name} must hold at least ${minimum} ${minimum === 1 ? 'value' : 'values'}, got ${values.length}`,
    );
  }
  const bad = values instanceof Float64Array ? firstNotFiniteOf(values) : firstNotFinite(values);
  if (bad >= 0) throw new RangeError(`${name} must hold finite numbers, entry ${bad} is ${values[bad]}`);
}

function firstNotFinite(values: Numbers): number {
  for (let i = 0; i < values.length; i++) if (!Number.isFinite(values[i])) return i;
  return -1;
}

/** The same for one kind of list only, which the compiler turns into a far faster loop. */
function firstNotFiniteOf(values: Float64Array): number {
  for (let i = 0; i < values.length; i++) if (!Number.isFinite(values[i])) return i;
  return -1;
}

/** Largest absolute value, 0 for none. */
export function largestSize(values: Float64Array): number {
  let most = 0;
  for (let i = 0; i < values.length; i++) {
    const size = Math.abs(values[i]!);
    if (size > most) most = size;
  }
  return most;
}

/** What the paired functions accept: differences, or two lists whose differences (first minus second) count. */
export type PairedArguments<Options> =
  readonly [differences: Numbers, options?: Options] | readonly [a: Numbers, b: Numbers, options?: Options];

const isNumbers = (value: unknown): value is Numbers =>
  typeof value === 'object' && value !== null && 'length' in value && typeof value.length === 'number';

/**
 * The differences and the options of a paired function's arguments.
 *
 * @throws RangeError naming `differences`, `a` or `b`: too few, not finite, unequal lengths
 */
export function readPairs<Options extends object>(
  args: PairedArguments<Options>,
  minimum: number,
): { differences: Float64Array; options: Partial<Options> } {
  const [first, second, third] = args;
  if (!isNumbers(second)) {
    requireNumbers('differences', first, minimum);
    return { differences: Float64Array.from(first), options: second ?? {} };
  }
  if (first.length !== second.length) {
    throw new RangeError(`a and b must have equal lengths, got ${first.length} and ${second.length}`);
  }
  requireNumbers('a', first, minimum);
  requireNumbers('b', second, minimum);
  return { differences: Float64Array.from(first, (value, i) => value - second[i]!), options: third ?? {} };
}

/**
 * Differences rounded to a multiple of `resolution` (0 keeps them): sums of offsets leave noise of
 * 1e-15 dB that would give a zero a sign and tear ties apart.
 */
export function roundTo(differences: Float64Array, resolution: number): Float64Array {
  if (!(resolution >= 0 && resolution < Infinity)) {
    throw new RangeError(`resolution must be zero or a positive number, got ${resolution}`);
  }
  return resolution === 0
    ? differences
    : differences.map((value) => Math.round(value / resolution) * resolution);
}
