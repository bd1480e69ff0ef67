// What a supervisor's browser checks before it signs: asked by tests/desk/test_browser_checks.py over standard input.
import { readFileSync } from "node:fs";
import { check } from "../../../static/desk/checks.js";

const { ready, pdf, kid } = JSON.parse(readFileSync(0, "utf8"));
const bytes = Uint8Array.from(Buffer.from(pdf, "base64"));
try {
  process.stdout.write(JSON.stringify({ checked: await check(ready, bytes, kid) }));
} catch (bad) {
  process.stdout.write(JSON.stringify({ refused: bad.code ?? String(bad) }));
}
