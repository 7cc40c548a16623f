/**
 * The demo's four people. They exist in a database loaded with the demo and nowhere else; their passwords
 * are public on purpose, and the API names them in demo mode only.
 */
export const demoAccounts = [
  {
    email: 'manager@corrib.example',
    name: 'Maeve (manager)',
    role: 'manager',
    password: 'demo-manager-corrib',
    does: 'Runs the station: members, receivers, antennas, feeds, tokens.',
  },
  {
    email: 'operator@corrib.example',
    name: 'Oisin (operator)',
    role: 'operator',
    password: 'demo-operator-corrib',
    does: 'Sits at the switch: logs what is on, mends the log, imports files.',
  },
  {
    email: 'analyst@corrib.example',
    name: 'Aine (analyst)',
    role: 'analyst',
    password: 'demo-analyst-corrib',
    does: 'Decides on antennas: asks questions, saves trials.',
  },
  {
    email: 'contester@corrib.example',
    name: 'Cormac (contester)',
    role: 'contester',
    password: 'demo-contester-corrib',
    does: 'Wants the answer now: Tonight, and what the others found.',
  },
] as const;
