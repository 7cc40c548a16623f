export { answerLadder, type LadderResult } from './answer.ts';
export type { LadderAntennaFacts, LadderInput, LadderReceiverFacts } from './input.ts';
