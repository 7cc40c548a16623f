/** Strokes of the rail's icons in a 24 by 24 box; drawn by us, one idea each. */
export const railIcons: Record<string, readonly string[]> = {
  // A round of sectors with one of them pointed at.
  tonight: ['M12 3a9 9 0 1 1-.01 0z', 'M12 12l3.6-7.8M12 12l7.8-3.6', 'M12 12v.01'],
  // Two levels on one scale.
  compare: ['M3 20h18', 'M8 20v-9', 'M16 20V5', 'M5.5 11h5M13.5 5h5'],
  // Three rungs, each with the place of its antenna.
  ladder: ['M4 6h16M4 12h16M4 18h16', 'M16 4v4M11 10v4M7 16v4'],
  // One line thrown from the upper to the lower contact.
  switching: ['M3 12h5', 'M8 12l8-6', 'M16 6h5', 'M16 18h5', 'M8 12v.01'],
  // Dots of different strength around the station.
  spots: [
    'M12 12v.01',
    'M6 7v.01',
    'M18 6v.01',
    'M19 15v.01',
    'M8 18v.01',
    'M12 12m-3.5 0a3.5 3.5 0 1 0 7 0a3.5 3.5 0 1 0-7 0',
  ],
  // A sheet going into a tray.
  imports: ['M12 3v11', 'M8 10l4 4l4-4', 'M4 15v5h16v-5'],
  // A pole with its wires and its ground.
  station: ['M12 4v16', 'M4 9l8-5l8 5', 'M7 20h10'],
  members: [
    'M9 11a3.5 3.5 0 1 0-.01 0z',
    'M3 20c.5-4 2.5-6 6-6s5.5 2 6 6',
    'M16 4.5a3.5 3.5 0 0 1 0 6.5M17.5 14.3c2 .8 3.2 2.7 3.5 5.7',
  ],
  // A sheet with a seal under its lines.
  reports: ['M6 3h12v18h-12z', 'M9 7h6M9 10.5h6', 'M14.5 15.5a2 2 0 1 1-.01 0z'],
  // The spread of many readings with its middle marked.
  methods: ['M3 19c5 0 5-13 9-13s4 13 9 13', 'M12 19v-8', 'M3 21h18'],
  settings: ['M4 7h9M17 7h3', 'M15 5v4', 'M4 17h3M11 17h9', 'M9 15v4'],
  theme: ['M12 4a8 8 0 1 1-.01 0z', 'M12 4v16', 'M15 6.5v11M18 9v6'],
  leave: ['M14 4h5v16h-5', 'M4 12h10', 'M10.5 8.5L14 12l-3.5 3.5'],
  more: ['M5 12v.01M12 12v.01M19 12v.01'],
};
