import type { MethodId } from './method-ids.ts';

/** A small table of the data that an example starts from, or of its steps. */
export interface ExampleTable {
  caption: string;
  head: readonly string[];
  /** First cell of a row is its name. */
  rows: readonly (readonly string[])[];
}

/** One line of a picture on the dB scale: the data as dots, an estimate, its interval. */
export interface ScaleRow {
  label: string;
  dots?: readonly number[];
  at?: number;
  interval?: readonly [number, number];
}

/** Everything in it was computed by the program's own functions from what its tables show. */
export interface WorkedExample {
  /** Sets the scene, in one or two sentences. */
  words: string;
  tables: readonly ExampleTable[];
  scale?: { rows: readonly ScaleRow[]; marginDb?: number };
  results: readonly { label: string; value: string }[];
  /** What the results mean. */
  close?: string;
}

export interface MethodEntry {
  id: MethodId;
  title: string;
  /** The question behind the number, as somebody at the radio would ask it. */
  asks: string;
  text: readonly string[];
  /** Rules that read better as a table. */
  rules?: ExampleTable;
  /** In plain notation. */
  formula?: readonly string[];
  example: () => WorkedExample;
  sources: readonly string[];
  related: readonly MethodId[];
}

export interface MethodGroup {
  /** Anchor of the group's heading. */
  key: string;
  title: string;
  entries: readonly MethodEntry[];
}
