import { formatDb, formatDbInterval, formatLevel, formatNumber, formatShare } from '../format.ts';
import { CELL_MIN_CLUSTERS, CELL_MIN_NIGHTS } from '../comparison/cells.ts';
import { benjaminiHochberg, clusterRegression, pool } from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import { pWords } from './worked-answer.ts';

const cells = [
  { name: 'north-east', nights: 3, values: [2.5, 3, 2, 3.5, 2.5, 1.5, 3, 2, 2.5] },
  { name: 'south', nights: 3, values: [0.5, -1, 0, 1, -0.5, 0, 0.5, -0.5] },
  { name: 'west', nights: 1, values: [4, 2, 5] },
];

export const mapCells: MethodEntry = {
  id: 'map-cells',
  title: 'Cells of a picture',
  asks: 'Is it better in this direction, at this hour, in this night?',
  text: [
    'Each sector, hour of a band, or night is a cell with an estimate of its own. All cells of one picture come from one fit, so that they share the receiver offsets and how well these are known.',
    `A cell speaks only with at least ${CELL_MIN_CLUSTERS} station-nights from at least ${CELL_MIN_NIGHTS} nights; the others are hatched, whatever they seem to show. In the picture of the nights a cell is one night, and ${CELL_MIN_CLUSTERS} stations make it speak.`,
    'Units whose bearing is unsure are left out of the directions only.',
  ],
  formula: ['d = difference(cell) + receiver offsets + error'],
  example: () => {
    const rows = cells.flatMap(({ values }, cell) => values.map((db) => ({ cell, db })));
    const fit = clusterRegression(
      { cells: rows.map(({ cell }) => cell), cellCount: cells.length },
      rows.map(({ db }) => db),
      rows.map((_, i) => i),
    );
    const found = cells.map((cell, k) => {
      const { estimate, interval, clusters } = fit.coefficients[k]!;
      const speaks = clusters >= CELL_MIN_CLUSTERS && cell.nights >= CELL_MIN_NIGHTS;
      return { ...cell, estimate: estimate!, interval: interval!, clusters, speaks };
    });
    return {
      words: 'Three directions, every unit from a station-night of its own:',
      tables: [
        {
          caption: 'Units, dB',
          head: ['Direction', 'Units'],
          rows: cells.map(({ name, values }) => [name, values.map((db) => formatNumber(db)).join(', ')]),
        },
        {
          caption: 'Cells',
          head: ['Direction', 'Difference', '95 % interval', 'Station-nights', 'Nights', 'Speaks'],
          rows: found.map((cell) => [
            cell.name,
            formatDb(cell.estimate, 2),
            formatDbInterval(cell.interval, 2),
            String(cell.clusters),
            String(cell.nights),
            cell.speaks ? 'yes' : 'no, hatched',
          ]),
        },
      ],
      scale: {
        rows: found.map(({ name, values, estimate, interval }) => ({
          ...{ label: name, dots: values, at: estimate, interval },
        })),
      },
      results: [],
      close: 'West looks best of all, and says nothing yet: three station-nights of one night.',
    };
  },
  sources: ['Cluster regression as for the interval; the evidence minimum is our own rule.'],
  related: ['adjusted-p', 'pooling', 'bearing', 'hours'],
};

const rawP = [0.001, 0.012, 0.028, 0.029, 0.045, 0.6];

export const adjustedP: MethodEntry = {
  id: 'adjusted-p',
  title: 'p adjusted across cells',
  asks: 'With so many cells, is one of them bound to look good by luck?',
  text: [
    'Of twenty cells without any difference, one will have a p below 0.05 by luck. The adjusted p allows for the number of cells that speak: if you believe every cell with an adjusted p up to 0.05, about one in twenty of those you believe is false.',
    'Sort the p, multiply each by the number of cells over its place, and let no p be larger than those after it.',
  ],
  formula: [
    'adjusted p(i) = smallest of p(j) \u00d7 m / j over all j \u2265 i; m cells, i and j places in order',
  ],
  example: () => {
    const { adjusted, rejectedCount } = benjaminiHochberg(rawP);
    return {
      words: 'Six sectors that speak:',
      tables: [
        {
          caption: 'p before and after',
          head: ['Place', 'p', 'p \u00d7 6 / place', 'Adjusted p'],
          rows: rawP.map((value, k) => [
            String(k + 1),
            pWords(value),
            pWords((value * rawP.length) / (k + 1)),
            pWords(adjusted[k]!),
          ]),
        },
      ],
      results: [
        { label: 'Below 0.05 before', value: String(rawP.filter((value) => value <= 0.05).length) },
        { label: 'Below 0.05 adjusted', value: String(rejectedCount) },
      ],
    };
  },
  sources: [
    'Benjamini and Hochberg (1995), Controlling the false discovery rate, Journal of the Royal Statistical Society B 57, 289\u2013300. Equals R: p.adjust(p, "BH").',
  ],
  related: ['map-cells', 'p', 'pooling'],
};

const sectors = [
  { name: '0 to 30\u00b0', db: 3.1, se: 0.5 },
  { name: '30 to 60\u00b0', db: 2.2, se: 0.6 },
  { name: '60 to 90\u00b0', db: 0.4, se: 0.5 },
  { name: '90 to 120\u00b0', db: 1.6, se: 1.2 },
  { name: '120 to 150\u00b0', db: 4.5, se: 1.5 },
];

export const poolingEntry: MethodEntry = {
  id: 'pooling',
  title: 'Pooled cells: tau, Q and I\u00b2',
  asks: 'Do the directions truly differ, and what is the best guess for each?',
  text: [
    'Cells scatter for two reasons: they are truly different, and each is measured with an error. Q holds the scatter against what the errors alone would make. Tau is how far the true values spread about their mean, in dB. I\u00b2 is the share of the scatter that is not error.',
    'A pooled cell is drawn toward the mean of all, the more, the less it knows: a cell with a small error stays where it is, a wild one with a large error comes in. Such guesses are on the whole closer to the truth than the raw ones.',
    'Raw and pooled can both be seen. With few cells the pooled intervals are somewhat short, because tau itself is taken as known.',
  ],
  formula: [
    'weight w = 1 / (se\u00b2 + tau\u00b2); mean = sum of w y / sum of w',
    'pooled = share \u00d7 own value + (1 \u2212 share) \u00d7 mean; share = tau\u00b2 / (tau\u00b2 + se\u00b2)',
    'Q = sum of (y \u2212 mean)\u00b2 / se\u00b2 with tau = 0; I\u00b2 = (Q \u2212 (k \u2212 1)) / Q, not below 0',
  ],
  example: () => {
    const pooled = pool(
      sectors.map(({ db }) => db),
      sectors.map(({ se }) => se),
      { method: 'paule-mandel' },
    );
    return {
      words: 'Five sectors that speak, with their standard errors:',
      tables: [
        {
          caption: 'Raw and pooled',
          head: ['Sector', 'Raw', 'Standard error', 'Own share', 'Pooled'],
          rows: sectors.map(({ name, db, se }, k) => [
            name,
            formatDb(db),
            formatLevel(se, 1),
            formatShare(pooled.cells![k]!.weight),
            formatDb(pooled.cells![k]!.estimate, 2),
          ]),
        },
      ],
      scale: {
        rows: sectors.map(({ name, db }, k) => ({
          label: name,
          dots: [db],
          at: pooled.cells![k]!.estimate,
          interval: pooled.cells![k]!.interval,
        })),
      },
      results: [
        { label: 'Mean of the sectors', value: formatDb(pooled.estimate, 2) },
        { label: 'Tau', value: formatLevel(pooled.tau, 2) },
        {
          label: 'Q',
          value: `${formatNumber(pooled.q, 2)}, ${pooled.qDf} degrees of freedom, p ${pWords(pooled.qP)}`,
        },
        { label: 'I\u00b2', value: formatShare(pooled.iSquared) },
      ],
      close: 'Rings are the raw values, bars the pooled ones. The last sector comes in most.',
    };
  },
  sources: [
    'Paule and Mandel (1982), Journal of Research of the National Bureau of Standards 87; DerSimonian and Laird (1986), Controlled Clinical Trials 7.',
    'Higgins and Thompson (2002), Statistics in Medicine 21 (I\u00b2); Raudenbush and Bryk (1985), Journal of Educational Statistics 10 (shrinking). Equals R: metafor::rma and blup.',
  ],
  related: ['map-cells', 'adjusted-p'],
};
