/**
 * Least squares of a few unknowns by Householder's reflections, the longest column first.
 * Twin of fieldkit/fits/triangle.py.
 * @module
 */

/** @typedef {number[][]} Rows */
/** The right side, and which column each of its is, beside the rows. @typedef {{rows: Rows, right: number[], order: number[]}} Triangle */

/** Of each column the part of its length that those before it do not have: from 0 to 1. @param {Triangle} triangle */
export function fresh(triangle) {
  return triangle.rows.map((row, k) => {
    let length = 0;
    for (let i = 0; i <= k; i++) length += triangle.rows[i][k] * triangle.rows[i][k];
    return length > 0 ? Math.abs(row[k]) / Math.sqrt(length) : 0;
  });
}

/** The triangle of the least squares of `rows` x = `right`. @param {Rows} rows @param {number[]} right @returns {Triangle} */
export function reduced(rows, right) {
  const [a, b] = [rows.map((row) => [...row]), [...right]];
  const order = a[0].map((_, j) => j);
  for (let k = 0; k < order.length; k++) {
    let [best, most] = [k, below(a, k, k)];
    for (let j = k + 1; j < order.length; j++) {
      const size = below(a, k, j);
      if (size > most) [best, most] = [j, size];
    }
    [order[k], order[best]] = [order[best], order[k]];
    for (const row of a) [row[k], row[best]] = [row[best], row[k]];
    const length = Math.sqrt(most);
    if (length > 0) reflect(a, b, k, a[k][k] > 0 ? -length : length);
  }
  return { rows: a.slice(0, order.length), right: b.slice(0, order.length), order };
}

/** The square of what is left of column j. @param {Rows} a @param {number} k @param {number} j */
function below(a, k, j) {
  let size = 0;
  for (let i = k; i < a.length; i++) size += a[i][j] * a[i][j];
  return size;
}

/**
 * Turns all rows from the k-th on so that of their k-th column only `onto`, in the k-th row, is left.
 * @param {Rows} a @param {number[]} b @param {number} k @param {number} onto
 */
function reflect(a, b, k, onto) {
  const v = a.slice(k).map((row) => row[k]);
  v[0] -= onto;
  let length = 0;
  for (const x of v) length += x * x;
  for (let j = k; j < a[0].length; j++) {
    let along = 0;
    for (let i = 0; i < v.length; i++) along += v[i] * a[k + i][j];
    along = (2 * along) / length;
    for (let i = 0; i < v.length; i++) a[k + i][j] -= along * v[i];
  }
  let along = 0;
  for (let i = 0; i < v.length; i++) along += v[i] * b[k + i];
  along = (2 * along) / length;
  for (let i = 0; i < v.length; i++) b[k + i] -= along * v[i];
}

/** x of the least squares, in the order of the columns that were given; none of them may say nothing new. @param {Triangle} triangle */
export function solved(triangle) {
  return in_order(triangle, back(triangle.rows, triangle.right));
}

/** @param {Triangle} triangle @param {number[]} of */
function in_order(triangle, of) {
  /** @type {number[]} */
  const found = Array(of.length).fill(0);
  for (const [k, j] of triangle.order.entries()) found[j] = of[k];
  return found;
}

/** @param {Rows} rows @param {number[]} right */
function back(rows, right) {
  const n = right.length;
  /** @type {number[]} */
  const x = Array(n).fill(0);
  for (let k = n - 1; k >= 0; k--) {
    let left = right[k];
    for (let j = k + 1; j < n; j++) left -= rows[k][j] * x[j];
    x[k] = left / rows[k][k];
  }
  return x;
}

/** x with `damping` |x|**2 beside, and by how much the squares alone become less by it. @param {Triangle} triangle @param {number} damping @returns {[number[], number]} */
export function damped(triangle, damping) {
  const { rows, right } = triangle;
  const [n, root] = [right.length, Math.sqrt(damping)];
  const beside = rows.map((_, i) => rows.map((__, j) => (i === j ? root : 0)));
  const x = solved(reduced([...rows, ...beside], [...right, ...Array(n).fill(0)]));
  let gained = 0;
  for (let k = 0; k < n; k++) {
    let left = right[k];
    for (let j = k; j < n; j++) left -= rows[k][j] * x[j];
    gained += right[k] * right[k] - left * left;
  }
  return [in_order(triangle, x), gained];
}

/** The inverse of the squares, of unknowns whose columns were divided by `scales`. @param {Triangle} triangle @param {number[]} scales @returns {Rows} */
export function covariance(triangle, scales) {
  const { rows } = triangle;
  const columns = rows.map((_, k) => in_order(triangle, back(rows, rows.map((__, i) => (i === k ? 1 : 0)))));
  /** @type {Rows} */
  const found = rows.map(() => Array(rows.length).fill(0));
  for (let i = 0; i < rows.length; i++) {
    for (let j = 0; j <= i; j++) {
      let total = 0;
      for (const column of columns) total += column[i] * column[j];
      found[i][j] = found[j][i] = total / scales[i] / scales[j];
    }
  }
  return found;
}
