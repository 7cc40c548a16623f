/** Geometry of the small compass; degrees clockwise from north, y downwards, the mast at the origin. */
export function tip(azimuthDeg: number, radius: number): string {
  const angle = (azimuthDeg * Math.PI) / 180;
  return `${(radius * Math.sin(angle)).toFixed(2)} ${(-radius * Math.cos(angle)).toFixed(2)}`;
}

/** The slice that a beam covers; the whole round from 360 degrees. */
export function compassWedge(headingDeg: number, beamwidthDeg: number, radius: number): string {
  if (beamwidthDeg >= 360) {
    return `M0 ${-radius}A${radius} ${radius} 0 1 1 0 ${radius}A${radius} ${radius} 0 1 1 0 ${-radius}Z`;
  }
  const from = tip(headingDeg - beamwidthDeg / 2, radius);
  const to = tip(headingDeg + beamwidthDeg / 2, radius);
  return `M0 0L${from}A${radius} ${radius} 0 ${beamwidthDeg > 180 ? 1 : 0} 1 ${to}Z`;
}
