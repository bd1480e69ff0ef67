/**
 * Does a fit leave more than the readings scatter? Then the readings follow another law.
 * Twin of fieldkit/fits/misfit.py, which says how that is told.
 * @module
 */

/** @typedef {import("./squares.js").Fit} Fit */

/** Places in order of x. @param {number[]} x */
function ordered(x) {
  return [...x.keys()].sort((i, j) => (x[i] < x[j] ? -1 : x[i] > x[j] ? 1 : i - j));
}

/** The variance about the fit by the variance between neighbours; null where the fit leaves nothing. @param {number[]} x @param {Fit} fit */
export function ratio(x, fit) {
  if (fit.s === 0) return null;
  const order = ordered(x);
  const { residuals: r, weights: w } = fit;
  let [total, count] = [0, 0];
  for (let k = 1; k < fit.n - 1; k += 1) {
    const [i, j, m] = [order[k - 1], order[k], order[k + 1]];
    if (!(x[m] > x[i])) continue;
    const a = (x[m] - x[j]) / (x[m] - x[i]);
    const b = 1 - a;
    const off = a * r[i] + b * r[m] - r[j];
    total += (off * off) / ((a * a) / w[i] + (b * b) / w[m] + 1 / w[j]);
    count += 1;
  }
  if (count === 0) return null;
  const least = fit.floor * fit.floor;
  const scatter = total / count > least ? total / count : least;
  return (fit.s * fit.s) / scatter;
}

/** @param {number} n */
export function limit(n) {
  return 1 + 42 / n;
}

/** Whether the readings end above the fit: the last three, on average. @param {number[]} x @param {Fit} fit */
export function above(x, fit) {
  let total = 0;
  for (const i of ordered(x).slice(-3)) total += fit.residuals[i];
  return total > 0;
}
