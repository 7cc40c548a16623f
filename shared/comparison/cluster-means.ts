/** Each cluster's mean difference with the receiver offsets taken out. O(units). */
export function clusterMeans(
  correctedDb: Float64Array,
  clusters: Int32Array,
  clusterCount: number,
): Float64Array {
  const sums = new Float64Array(clusterCount);
  const counts = new Int32Array(clusterCount);
  for (let i = 0; i < correctedDb.length; i++) {
    sums[clusters[i]!]! += correctedDb[i]!;
    counts[clusters[i]!]!++;
  }
  return sums.map((sum, c) => sum / counts[c]!);
}
