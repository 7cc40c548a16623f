/**
 * How an antenna is told apart: by its letter, then by a shape, only then by a colour. Shape and colour follow from
 * the letter alone (six shapes, seven colours: no two letters share both), so that the same antenna looks the same
 * in every picture, and in night vision, where there is one colour, the shape is left.
 */
export type AntennaShape = 'circle' | 'square' | 'diamond' | 'triangle' | 'shield' | 'hexagon';

export interface AntennaLook {
  letter: string;
  shape: AntennaShape;
  /** SVG path of the shape in a 24 by 24 box. */
  path: string;
  /** Where the letter's middle sits in that box, from the top. */
  letterY: number;
  /** 1 to 7: the tokens --antenna-1, --antenna-1-ink, --antenna-1-line and so on. */
  colour: number;
  /** The same shape for ECharts' `symbol`. */
  symbol: string;
}

const shapes: readonly { shape: AntennaShape; path: string; letterY: number }[] = [
  { shape: 'circle', path: 'M12 1.5a10.5 10.5 0 1 1 0 21a10.5 10.5 0 1 1 0-21z', letterY: 12 },
  { shape: 'square', path: 'M3 3h18v18h-18z', letterY: 12 },
  { shape: 'diamond', path: 'M12 .5l11.5 11.5l-11.5 11.5l-11.5-11.5z', letterY: 12 },
  { shape: 'triangle', path: 'M12 .8l11.7 21.7h-23.4z', letterY: 15.5 },
  { shape: 'shield', path: 'M2.5 2h19v10.5l-9.5 10.5l-9.5-10.5z', letterY: 10.5 },
  { shape: 'hexagon', path: 'M.5 12l6-10h11l6 10l-6 10h-11z', letterY: 12 },
];
const colours = 7;

/** Anything but A to Z (an antenna without a marker yet) is drawn as a question mark in a circle. */
export function antennaLook(marker: string | null | undefined): AntennaLook {
  const letter = marker?.trim().toUpperCase().charAt(0) ?? '';
  const index = letter.charCodeAt(0) - 65;
  const known = index >= 0 && index < 26;
  const { shape, path, letterY } = shapes[known ? index % shapes.length : 0]!;
  return {
    letter: known ? letter : '?',
    shape,
    path,
    letterY,
    colour: known ? (index % colours) + 1 : 1,
    symbol: `path://${path}`,
  };
}
