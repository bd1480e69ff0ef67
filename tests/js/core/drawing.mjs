// Draws what standard input asks for, [{"draw", "args"}], and prints {"svg", "says"} for each: for tests/drawing/test_twins.py.
import { readFileSync } from "node:fs";
import { DRAWINGS, says } from "../../../static/core/drawing.js";

const asked = JSON.parse(readFileSync(0, "utf8"));
const answers = asked.map(({ draw, args }) => ({
  svg: DRAWINGS[draw](...args),
  says: draw === "tiny" ? says.scale(args[0]) : says[draw] ? says[draw](...args) : "",
}));
process.stdout.write(JSON.stringify(answers));
