export { halfWeightWords, heardOnlyWords, pText } from '../../../shared/pictures/fairness-words.ts';
