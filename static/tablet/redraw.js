/**
 * Drawings and words that change with every key: what stays keeps its element, and only what differs is touched, so that
 * the page need not be laid out anew. A drawing is flat SVG text of core/drawing; one with shapes inside shapes is replaced whole.
 */
import { drawn } from "./dom.js";

const SVG = "http://www.w3.org/2000/svg";

/** what stands in an element now @type {WeakMap<Element, {text: string, head: string, shapes: string[] | null}>} */
const standing = new WeakMap();

/** Words in place of those that stand there; the text node stays. @param {Node} node @param {string} text */
export function reword(node, text) {
  const first = node.firstChild;
  if (first instanceof Text && first === node.lastChild) {
    if (first.data !== text) first.data = text;
  } else if (first || text) node.textContent = text;
}

/** A drawing in place of the one that stands there; none for "". @param {Element} holder @param {string} text */
export function redraw(holder, text) {
  const was = standing.get(holder);
  if (was?.text === text) return;
  const now = { text, ...taken(text) };
  standing.set(holder, now);
  const svg = holder.firstElementChild;
  if (!text) holder.replaceChildren();
  else if (!svg || !was?.shapes || !now.shapes) holder.replaceChildren(drawn(text));
  else {
    dress(svg, was.head, now.head);
    shapes(svg, was.shapes, now.shapes);
  }
}

/** The tag of the drawing itself, and its shapes, each without its outer brackets; null for these where they are not flat. @param {string} text */
function taken(text) {
  const head = text.slice(0, text.indexOf(">") + 1), body = text.slice(head.length + 1, -"></svg>".length);
  return { head, shapes: text && !/<g|<svg|><\//.test(body) ? body.split("><") : null };
}

/** Shapes at both ends that are the same stay; between them one of the same kind is changed, others come or go. @param {Element} svg @param {string[]} was @param {string[]} now */
function shapes(svg, was, now) {
  const least = Math.min(was.length, now.length);
  let head = 0, tail = 0;
  while (head < least && was[head] === now[head]) head += 1;
  while (tail < least - head && was[was.length - 1 - tail] === now[now.length - 1 - tail]) tail += 1;
  const nodes = [...svg.children].slice(head, was.length - tail), after = svg.children[was.length - tail] ?? null;
  let k = 0;
  for (let n = head; n < now.length - tail; n += 1) {
    const kind = kindOf(now[n]);
    while (k < nodes.length && kindOf(was[head + k]) !== kind && nodes.length - k > now.length - tail - n) nodes[k++].remove();
    if (k < nodes.length && kindOf(was[head + k]) === kind) {
      change(nodes[k], was[head + k], now[n]);
      k += 1;
    } else {
      const made = document.createElementNS(SVG, kind);
      change(made, "", now[n]);
      svg.insertBefore(made, nodes[k] ?? after);
    }
  }
  for (; k < nodes.length; k += 1) nodes[k].remove();
}

/** @param {string} shape */
const kindOf = (shape) => shape.slice(0, shape.indexOf(" "));

/** @param {Element} node @param {string} was @param {string} now */
function change(node, was, now) {
  if (was === now) return;
  // a text's words stand after its tag; a shape has none
  const [before, after] = [was.indexOf(">"), now.indexOf(">")];
  dress(node, before < 0 ? was : was.slice(0, before), after < 0 ? now : now.slice(0, after));
  if (after >= 0) reword(node, plain(now.slice(after + 1, now.lastIndexOf("<"))));
}

/** Attributes as the tag has them. @param {Element} node @param {string} was @param {string} now */
function dress(node, was, now) {
  if (was === now) return;
  // `<path class="`, its value, `" d="`, its value ...: the same kind of shape nearly always has the same attributes
  const [before, after] = [was.split('"'), now.split('"')];
  const alike = before.length === after.length && before.every((part, k) => k % 2 === 1 || part === after[k]);
  for (let k = 1; k < before.length && !alike; k += 2) node.removeAttribute(nameOf(before[k - 1]));
  for (let k = 1; k < after.length; k += 2) {
    if (alike && before[k] === after[k]) continue;
    const name = nameOf(after[k - 1]);
    if (name !== "xmlns") node.setAttribute(name, plain(after[k]));
  }
}

/** The name of an attribute in what stands before its value. @param {string} part */
const nameOf = (part) => part.slice(part.lastIndexOf(" ") + 1, -1);

/** Text as it was before it was written into a drawing. @param {string} text */
const plain = (text) => (text.includes("&") ? text.replaceAll("&lt;", "<").replaceAll("&gt;", ">").replaceAll("&quot;", '"').replaceAll("&amp;", "&") : text);
