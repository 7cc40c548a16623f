/** Geometry of the compass on which sectors are chosen; degrees clockwise from north, y downwards. */

/** The sector under a point, seen from the centre; null at the centre itself, where every sector meets. */
export function sectorAt(dx: number, dy: number, sectorCount: number): number | null {
  if (Math.hypot(dx, dy) < 1e-9) return null;
  const azimuthDeg = ((Math.atan2(dx, -dy) * 180) / Math.PI + 360) % 360;
  return Math.floor((azimuthDeg / 360) * sectorCount) % sectorCount;
}

export function pointAt(azimuthDeg: number, radius: number): [x: number, y: number] {
  const angle = (azimuthDeg * Math.PI) / 180;
  return [radius * Math.sin(angle), -radius * Math.cos(angle)];
}

/** SVG path of one sector between two radii about the origin. */
export function sectorPath(sector: number, sectorCount: number, inner: number, outer: number): string {
  const widthDeg = 360 / sectorCount;
  const [from, to] = [sector * widthDeg, (sector + 1) * widthDeg];
  const write = (azimuthDeg: number, radius: number) =>
    pointAt(azimuthDeg, radius)
      .map((part) => part.toFixed(2))
      .join(' ');
  const large = widthDeg > 180 ? 1 : 0;
  return (
    `M${write(from, inner)} L${write(from, outer)} A${outer} ${outer} 0 ${large} 1 ${write(to, outer)} ` +
    `L${write(to, inner)} A${inner} ${inner} 0 ${large} 0 ${write(from, inner)} Z`
  );
}

/** Sectors of a range that may run over north: from 330 to 60 degrees. Both ends are sector borders. */
export function sectorsBetween(fromSector: number, toSector: number, sectorCount: number): number[] {
  const length = ((toSector - fromSector + sectorCount) % sectorCount || sectorCount) as number;
  return Array.from({ length }, (_, step) => (fromSector + step) % sectorCount).sort(
    (one, other) => one - other,
  );
}
