"""Least squares of a few unknowns by Householder's reflections (A. S. Householder, J. ACM 5 (1958) 339, from memory).

Rows are turned until a triangle is left; nothing is squared, so half of the digits are not lost. Of the columns that
are left the longest is always taken next (P. Businger, G. H. Golub 1965, from memory), so that one that says nothing
new comes last. Columns should be scaled to about the same length. Twin: static/core/fits/triangle.js.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

Rows = list[list[float]]


@dataclass(frozen=True)
class Triangle:
    """A triangle that has the same least squares as some rows, its right side, and which column each of its is."""

    rows: Rows
    right: list[float]
    order: list[int]

    def new(self) -> list[float]:
        """Of each column, in its own order, the part of its length that those before it do not have: from 0 to 1."""
        found = []
        for k, row in enumerate(self.rows):
            length = 0.0
            for above in self.rows[: k + 1]:
                length += above[k] * above[k]
            found.append(abs(row[k]) / math.sqrt(length) if length > 0.0 else 0.0)
        return found


def reduced(rows: Rows, right: list[float]) -> Triangle:
    """The triangle of the least squares of `rows` x = `right`."""
    a, b = [list(row) for row in rows], list(right)
    order = list(range(len(a[0])))
    for k in range(len(order)):
        best, most = k, _below(a, k, k)
        for j in range(k + 1, len(order)):
            size = _below(a, k, j)
            best, most = (j, size) if size > most else (best, most)
        order[k], order[best] = order[best], order[k]
        for row in a:
            row[k], row[best] = row[best], row[k]
        length = math.sqrt(most)
        if length > 0.0:
            _reflect(a, b, k, -length if a[k][k] > 0.0 else length)
    return Triangle(a[: len(order)], b[: len(order)], order)


def _below(a: Rows, k: int, j: int) -> float:
    """The square of what is left of column j."""
    size = 0.0
    for row in a[k:]:
        size += row[j] * row[j]
    return size


def _reflect(a: Rows, b: list[float], k: int, onto: float) -> None:
    """Turns all rows from the k-th on so that of their k-th column only `onto`, in the k-th row, is left."""
    v = [row[k] for row in a[k:]]
    v[0] -= onto
    length = 0.0
    for x in v:
        length += x * x
    for j in range(k, len(a[0])):
        along = 0.0
        for i, x in enumerate(v):
            along += x * a[k + i][j]
        along = 2.0 * along / length
        for i, x in enumerate(v):
            a[k + i][j] -= along * x
    along = 0.0
    for i, x in enumerate(v):
        along += x * b[k + i]
    along = 2.0 * along / length
    for i, x in enumerate(v):
        b[k + i] -= along * x


def solved(triangle: Triangle) -> list[float]:
    """x of the least squares, in the order of the columns that were given; none of them may say nothing new."""
    return _in_order(triangle, _solved(triangle.rows, triangle.right))


def _in_order(triangle: Triangle, of: list[float]) -> list[float]:
    found = [0.0] * len(of)
    for k, j in enumerate(triangle.order):
        found[j] = of[k]
    return found


def _solved(rows: Rows, right: list[float]) -> list[float]:
    n = len(right)
    x = [0.0] * n
    for k in range(n - 1, -1, -1):
        left = right[k]
        for j in range(k + 1, n):
            left -= rows[k][j] * x[j]
        x[k] = left / rows[k][k]
    return x


def damped(triangle: Triangle, damping: float) -> tuple[list[float], float]:
    """x of the least squares with `damping` |x|**2 beside, and by how much the squares alone become less by it."""
    n, root = len(triangle.right), math.sqrt(damping)
    below = [[root if i == j else 0.0 for j in range(n)] for i in range(n)]
    x = solved(reduced(triangle.rows + below, triangle.right + [0.0] * n))
    gained = 0.0
    for k, right in enumerate(triangle.right):
        left = right
        for j in range(k, n):
            left -= triangle.rows[k][j] * x[j]
        gained += right * right - left * left
    return _in_order(triangle, x), gained


def covariance(triangle: Triangle, scales: list[float]) -> Rows:
    """The inverse of the squares: of unknowns whose columns were divided by `scales`, and readings of variance 1."""
    n = len(triangle.rows)
    columns = []
    for k in range(n):
        unit = [1.0 if i == k else 0.0 for i in range(n)]
        columns.append(_in_order(triangle, _solved(triangle.rows, unit)))
    found = [[0.0] * n for _ in range(n)]
    for i in range(n):
        for j in range(i + 1):
            total = 0.0
            for column in columns:
                total += column[i] * column[j]
            found[i][j] = found[j][i] = total / scales[i] / scales[j]
    return found
