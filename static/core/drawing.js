// Drawings: energy rails, limit scales and marks as SVG text, pure functions of plain data.
// Twin of fieldkit/drawing/__init__.py, which says what each draws and what a model holds; equal character for
// character, held by tests/vectors/drawing/. Positions are whole tenths of a pixel, values BigInt: no float decides.
// Not here: the DOM, data, time. To add a drawing: a module in each twin, a line in DRAWINGS, a vector file.

import { mark, symbol } from "./drawing/marks.js";
import { rails } from "./drawing/rails.js";
import * as says from "./drawing/says.js";
import { scale } from "./drawing/scale.js";
import { timeline } from "./drawing/timeline.js";
import { tiny } from "./drawing/tiny.js";
import { wait } from "./drawing/wait.js";

export const DRAWINGS = { scale, tiny, wait, rails, timeline, mark, symbol };

export { mark, rails, says, scale, symbol, timeline, tiny, wait };
