/** How unlikely a count is by chance. */

/**
 * Bound on -ln P(X >= k) of a binomial variable: n times the relative entropy of k/n and p; 0 where k is not above its
 * mean.
 * @see Chernoff 1952, Ann. Math. Stat. 23, 493
 */
export function surprise(k: number, n: number, p: number): number {
  if (!(n > 0) || !(k > n * p)) return 0;
  const rest = n - k;
  return k * Math.log(k / (n * p)) + (rest > 0 ? rest * Math.log(rest / (n * (1 - p))) : 0);
}

/** ln of the likelihood of k in n at rate p, without the binomial coefficient. */
export function logLikelihood(k: number, n: number, p: number): number {
  const rest = n - k;
  return (k > 0 ? k * Math.log(p) : 0) + (rest > 0 ? rest * Math.log(1 - p) : 0);
}

/** The normal deviate whose upper tail is about exp(-surprise). */
export function sigmasOf(surpriseValue: number): number {
  return Math.sqrt(2 * surpriseValue);
}
