/**
 * Noise that is a function of a key and a time, not of how many numbers were drawn before. A simulated
 * fade must be the same whether a night is made in one go, in two halves or spot by spot as time passes;
 * a generator with a hidden state cannot promise that. Keys come from `noiseKey`.
 */

/** Murmur3 finaliser: every input bit reaches every output bit. */
function mix(value: number): number {
  let h = value | 0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) | 0;
}

/** A 32-bit key for a thing that has noise of its own, from whole numbers that name it. Order matters. */
export function noiseKey(...parts: number[]): number {
  let key = 0x2545f491;
  for (const part of parts) key = mix(Math.imul(key, 0x01000193) ^ mix(part + 0x9e3779b9));
  return key;
}

/** A uniform number in [0, 1) for step `step` of `key`. */
export function uniformAt(key: number, step: number): number {
  return (mix(key ^ mix(step + 0x7f4a7c15)) >>> 0) / 4294967296;
}

/** A standard normal number for step `step` of `key` (Box and Muller 1958). */
export function normalAt(key: number, step: number): number {
  const first = mix(key ^ mix(step + 0x7f4a7c15));
  const second = mix(first + 0x632be5ab);
  // The added half keeps the logarithm away from zero.
  const radius = Math.sqrt(-2 * Math.log(((first >>> 0) + 0.5) / 4294967296));
  return radius * Math.cos((2 * Math.PI * (second >>> 0)) / 4294967296);
}

/**
 * Smooth noise with mean 0 and standard deviation 1 at every moment: independent knots every
 * `knotSeconds`, blended so that the variance does not dip between them. Two moments more than two knots
 * apart are independent.
 */
export function smoothNoise(key: number, timeMs: number, knotSeconds: number): number {
  const position = timeMs / (1000 * knotSeconds);
  const knot = Math.floor(position);
  const weight = position - knot;
  const left = 1 - weight;
  const blend = left * normalAt(key, knot) + weight * normalAt(key, knot + 1);
  return blend / Math.sqrt(left * left + weight * weight);
}
