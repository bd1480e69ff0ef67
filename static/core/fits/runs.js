/**
 * Do residuals run? Too few changes of sign along the settings mean that the curve has another shape than the fit.
 * Twin of fieldkit/fits/runs.py.
 * @module
 */

export const TOO_FEW = -2;

/**
 * How many standard deviations the count of runs is from its mean, along rising `x`; null where there is none.
 * @param {number[]} x @param {number[]} residuals @param {number} floor up to which a residual is rounding
 * @returns {number | null}
 */
export function z(x, residuals, floor) {
  const order = [...x.keys()].sort((i, j) => (x[i] < x[j] ? -1 : x[i] > x[j] ? 1 : i - j));
  const signs = order.filter((i) => Math.abs(residuals[i]) > floor).map((i) => residuals[i] > 0);
  const n = signs.length;
  const above = signs.filter((sign) => sign).length;
  const pairs = 2 * above * (n - above);
  if (n < 2 || pairs * (pairs - n) <= 0) return null;
  let runs = 1;
  for (let i = 1; i < n; i += 1) runs += signs[i] !== signs[i - 1] ? 1 : 0;
  const deviation = Math.sqrt((pairs * (pairs - n)) / (n * n * (n - 1)));
  return (runs - (pairs / n + 1)) / deviation;
}

/** @param {number[]} x @param {number[]} residuals @param {number} floor */
export function run(x, residuals, floor) {
  const found = z(x, residuals, floor);
  return found !== null && found < TOO_FEW;
}
