import type { Feed } from '../../../shared/contracts/feed.ts';

/** Why no pair arrives, and what would make one; `toStation`: the feeds can be seen to under Station. */
export function noPairsWords(
  feeds: readonly Pick<Feed, 'enabled' | 'health'>[],
  mayManage: boolean,
): { title: string; next: string; toStation: boolean } {
  const on = feeds.filter(({ enabled }) => enabled);
  if (on.length === 0) {
    return {
      title: 'No live feed',
      next: mayManage
        ? 'Add the telnet address of your skimmer under Station, Feeds: spots then arrive by themselves.'
        : 'A manager adds the telnet address of the skimmer under Station, Feeds: spots then arrive by themselves.',
      toStation: mayManage,
    };
  }
  const lost = on.every(({ health }) => health?.state === 'lost' || health?.state === 'silent');
  return {
    title: lost ? 'The live feed is silent' : 'No paired station yet',
    next: lost
      ? 'No spots are arriving. Check the skimmer and its network; the program connects again by itself.'
      : 'A line appears as soon as two receivers on two antennas report the same station at the same moment.',
    toStation: false,
  };
}
