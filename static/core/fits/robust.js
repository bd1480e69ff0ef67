/**
 * Medians, and what is built of them: a scale and a straight line that a few outliers do not move.
 * Twin of fieldkit/fits/robust.py.
 * @module
 */

export const MAD_TO_SIGMA = 1.4826;

/** The middle one, or the average of the two in the middle. @param {ArrayLike<number>} x */
export function median(x) {
  const order = Float64Array.from(x).sort();
  const half = Math.floor(order.length / 2);
  if (order.length % 2 === 1) return order[half] + 0;
  return (order[half - 1] + order[half]) / 2 + 0;
}

/** 1.4826 times the median distance from the median. @param {number[]} x */
export function deviation(x) {
  const middle = median(x);
  return MAD_TO_SIGMA * median(x.map((v) => Math.abs(v - middle)));
}

/** Slope and intercept by medians; `x` rises. @param {number[]} x @param {number[]} y @returns {[number, number]} */
export function trend(x, y) {
  const slopes = new Float64Array((x.length * (x.length - 1)) / 2);
  let k = 0;
  for (let j = 1; j < x.length; j += 1) {
    for (let i = 0; i < j; i += 1) {
      slopes[k] = (y[j] - y[i]) / (x[j] - x[i]);
      k += 1;
    }
  }
  const slope = median(slopes);
  return [slope, median(y.map((b, i) => b - slope * x[i]))];
}
