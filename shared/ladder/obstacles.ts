import { enumerate } from '../contracts/comparison-sentence.ts';
import type { LadderObstacle } from '../contracts/ladder.ts';
import { ladderGroups } from '../stats/index.ts';
import type { LadderContact, LadderResult } from '../stats/index.ts';
import type { LadderAntennaFacts, LadderInput, LadderReceiverFacts } from './input.ts';

type Stands = Pick<LadderResult, 'groups' | 'contacts' | 'antennas'>;
type Contact = LadderResult['contacts'][number];

/** Something to do, and the contacts that it would make. */
interface Cure {
  words: string;
  contacts: LadderContact[];
}

const minutes = 'for about 40 minutes';

/**
 * Why not all antennas stand on one ladder, and what would put them there for the least effort. A cure is
 * offered only when the contacts it makes do join the antennas: that is worked out, not taken for granted.
 */
export function findObstacles(input: LadderInput, result: Stands | null, where: string): LadderObstacle[] {
  return new ObstacleFinder(input, result ?? { groups: [], contacts: [], antennas: [] }, where).find();
}

class ObstacleFinder {
  private readonly antennas: Map<number, LadderAntennaFacts>;
  private readonly receivers: Map<number, LadderReceiverFacts>;
  private readonly inUse: number[];
  private readonly rows: Map<number, number>;

  constructor(
    input: LadderInput,
    private readonly result: Stands,
    private readonly where: string,
  ) {
    this.antennas = new Map(input.antennas.map((antenna) => [antenna.id, antenna]));
    this.receivers = new Map(input.receivers.map((receiver) => [receiver.id, receiver]));
    this.inUse = input.receivers.filter(({ retired }) => !retired).map(({ id }) => id);
    this.rows = new Map(result.antennas.map(({ id, rows }) => [id, rows]));
  }

  find(): LadderObstacle[] {
    const { groups } = this.result;
    const worlds = this.linkedWorlds();
    const main = groups[0];
    const found: LadderObstacle[] = [];
    for (const world of worlds) {
      const own = groups.filter((group) => world.has(group[0]!));
      const [first, ...others] = own;
      if (main && first && first !== main) found.push(this.unlinked(own.flat(), main));
      for (const group of others) found.push(this.inseparable(group, first!, world));
    }
    const without = [...this.antennas.values()].filter(
      ({ id, inService }) => inService && !this.rows.has(id),
    );
    if (without.length > 0) found.push(this.withoutUnits(without, main ?? []));
    return found;
  }

  /** Antennas that units join, whether or not receivers can be told from them; the main group's come first. */
  private linkedWorlds(): Set<number>[] {
    const worlds: Set<number>[] = [];
    for (const id of this.result.groups.flat()) {
      if (worlds.some((world) => world.has(id))) continue;
      const world = new Set([id]);
      // Iterating over a set reaches what is added on the way.
      for (const reached of world) {
        for (const { antennaA, antennaB } of this.result.contacts) {
          if (antennaA === reached) world.add(antennaB);
          if (antennaB === reached) world.add(antennaA);
        }
      }
      worlds.push(world);
    }
    return worlds;
  }

  private inseparable(group: number[], first: number[], world: Set<number>): LadderObstacle {
    // The busiest meeting with the ladder it should stand on, else with any other antenna.
    const meetings = this.result.contacts
      .filter((c) => group.includes(c.antennaA) !== group.includes(c.antennaB) && world.has(c.antennaA))
      .map((c) => (group.includes(c.antennaB) ? c : turned(c)))
      .sort(
        (c, d) => Number(first.includes(d.antennaA)) - Number(first.includes(c.antennaA)) || d.rows - c.rows,
      );
    const { antennaA: x, antennaB: y } = meetings[0]!;
    const together = meetings.filter((c) => c.antennaA === x && c.antennaB === y);
    const onX = receiversOf(together.map((c) => c.receiverA));
    const onY = receiversOf(together.map((c) => c.receiverB));
    const [rx, ry] = [onX[0], onY[0]];
    const cures: Cure[] = [];
    if (rx !== undefined && ry !== undefined && rx !== ry && this.usable(rx, ry)) {
      cures.push({
        words: `swap the two antennas ${minutes}: ${this.antenna(x)} on ${this.receiver(ry)} and ${this.antenna(y)} on ${this.receiver(rx)}`,
        contacts: [meet(x, ry, y, rx)],
      });
      cures.push({
        words: `put both ${this.receiver(rx)} and ${this.receiver(ry)} on ${this.antenna(x)} ${minutes}`,
        contacts: [meet(x, rx, x, ry)],
      });
    }
    cures.push(this.alternate(x, [y]));
    return {
      kind: 'inseparable',
      antennaIds: group,
      receiverIds: receiversOf([...onX, ...onY]),
      sentence:
        `${this.antenna(x)} and ${this.antenna(y)} cannot be separated from their receivers${this.where}: ` +
        `heard together, ${this.antenna(x)} was only ever on ${this.list(onX)} and ${this.antenna(y)} only on ` +
        `${this.list(onY)}, and nothing else tells these receivers apart.`,
      cures: this.checked(cures, x, [y]),
    };
  }

  private unlinked(apart: number[], main: number[]): LadderObstacle {
    const [x, y] = [this.busiest(main), this.busiest(apart)];
    return {
      kind: 'unlinked',
      antennaIds: apart,
      receiverIds: [],
      sentence:
        `No unit links ${enumerate(apart.map((id) => this.antenna(id)))} to ` +
        `${enumerate(main.map((id) => this.antenna(id)))}${this.where}: they were never heard at the same time.`,
      cures: this.checked(this.meetings(x, [y]), x, [y]),
    };
  }

  private withoutUnits(without: LadderAntennaFacts[], main: number[]): LadderObstacle {
    const ids = without.map(({ id }) => id);
    const x = main.length > 0 ? this.busiest(main) : ids[0]!;
    const others = ids.filter((id) => id !== x);
    const have = ids.length === 1 ? 'has' : 'have';
    return {
      kind: 'no units',
      antennaIds: ids,
      receiverIds: [],
      sentence: `${enumerate(without.map(({ name }) => name))} ${have} no units${this.where}.`,
      cures: others.length === 0 ? [] : this.checked(this.meetings(x, others), x, others),
    };
  }

  /** Ways to hear an antenna at the same time as one, or each of several, that it never met. */
  private meetings(x: number, others: readonly number[]): Cure[] {
    const pairs = this.inUse.flatMap((r, i) => this.inUse.slice(i + 1).map((s) => [r, s] as const));
    const joining = (r: number, s: number) => others.map((y) => meet(x, r, y, s));
    // Receivers that are known apart need no swap.
    const known = pairs.find(([r, s]) => this.helps(joining(r, s), x, others));
    const [r, s] = known ?? pairs[0] ?? [];
    const cures = [this.alternate(x, others)];
    if (r === undefined || s === undefined) return cures;
    const put = `put ${this.antenna(x)} on ${this.receiver(r)} and ${this.each(others)} on ${this.receiver(s)} ${minutes}`;
    const swapped = {
      words: `${put}, swapping them half-way`,
      contacts: [...joining(r, s), ...joining(s, r)],
    };
    return [known ? { words: put, contacts: joining(r, s) } : swapped, ...cures];
  }

  private alternate(x: number, others: readonly number[]): Cure {
    return {
      words: `let one receiver alternate between ${this.antenna(x)} and ${this.each(others)}, a few minutes each`,
      contacts: others.map((y) => ({ antennaA: x, antennaB: y, receiverA: null, receiverB: null })),
    };
  }

  private each(ids: readonly number[]): string {
    const names = enumerate(ids.map((id) => this.antenna(id)));
    return ids.length === 1 ? names : `in turn ${names}`;
  }

  /** Cures that work, as sentences. Nobody can listen on an antenna that is taken down. */
  private checked(cures: Cure[], x: number, others: readonly number[]): string[] {
    if (![x, ...others].every(this.isInService)) return [];
    return cures
      .filter(({ contacts }) => this.helps(contacts, x, others))
      .map(({ words }, i) => `${i === 0 ? words[0]!.toUpperCase() + words.slice(1) : `Or ${words}`}.`);
  }

  private helps(more: LadderContact[], x: number, others: readonly number[]): boolean {
    return ladderGroups([...this.result.contacts, ...more]).antennas.some(
      (group) => group.includes(x) && others.every((y) => group.includes(y)),
    );
  }

  private busiest(ids: readonly number[]): number {
    const weight = (id: number) => (this.isInService(id) ? 1e12 : 0) + (this.rows.get(id) ?? 0);
    return ids.reduce((most, id) => (weight(id) > weight(most) ? id : most));
  }

  private isInService = (id: number) => this.antennas.get(id)?.inService === true;
  private usable = (...ids: number[]) => ids.every((id) => this.inUse.includes(id));
  private antenna = (id: number) => this.antennas.get(id)?.name ?? `antenna ${id}`;
  private receiver = (id: number) => this.receivers.get(id)?.callSign ?? `receiver ${id}`;
  private list = (ids: readonly number[]) => enumerate(ids.map(this.receiver));
}

const meet = (x: number, rx: number, y: number, ry: number): LadderContact => ({
  antennaA: x,
  antennaB: y,
  receiverA: rx,
  receiverB: ry,
});

const turned = (c: Contact): Contact => ({
  ...c,
  antennaA: c.antennaB,
  antennaB: c.antennaA,
  receiverA: c.receiverB,
  receiverB: c.receiverA,
});

const receiversOf = (ids: readonly (number | null)[]) =>
  [...new Set(ids.filter((id) => id !== null))].sort((a, b) => a - b);
