/** First key of every random stream of a simulation: one purpose each, so that none disturbs another. */
export const STREAM = {
  layout: 1,
  noise: 2,
  gains: 3,
  atmosphere: 4,
  fault: 5,
} as const;
