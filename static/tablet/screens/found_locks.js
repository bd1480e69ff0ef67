/** Locks that are on the cabinet and not on the board: each is named with its point, number and holder before anything opens. */
import { field, fresh, h } from "../dom.js";

/** A labelled list to choose from. @param {string} label @param {{value: string, label: string}[]} options @param {string} chosen */
function chooser(label, options, chosen) {
  const id = fresh("list");
  const input = /** @type {HTMLSelectElement} */ (h("select", { id }, options.map((o) => h("option", { value: o.value }, o.label))));
  input.value = chosen;
  return { node: h("div", { class: "field" }, h("label", { for: id }, label), input), input };
}

/**
 * @param {any} ctx @param {() => void} onchange
 * @returns {{node: HTMLElement, locks: () => any[], complete: () => boolean}}
 */
export function foundLocks(ctx, onchange) {
  const points = Object.entries(ctx.app.held.kit?.registers?.cabinets?.[ctx.state.started.cabinet]?.points ?? {});
  const people = [...(ctx.state.started?.people ?? []).map((/** @type {any} */ p) => ({ value: p.id, label: p.name })), { value: "", label: "Somebody else" }];
  const place = h("ul", {}), rows = /** @type {any[]} */ ([]);

  function add() {
    const point = chooser("Isolating point", points.map(([id, p]) => ({ value: id, label: /** @type {any} */ (p).title ?? id })), points[0]?.[0] ?? "");
    const number = field({ label: "Number on the lock", code: true }), tag = field({ label: "Number on the tag", code: true });
    const who = chooser("Its holder", people, ctx.state.recorder), name = field({ label: "Name of the holder" });
    name.node.hidden = true;
    const row = { point, number, tag, who, name, node: h("li", { class: "found-lock", "data-found-lock": true }, h("div", { class: "fields cols" }, point.node, number.node, tag.node, who.node, name.node),
      h("button", { type: "button", class: "close", on: { click: () => { rows.splice(rows.indexOf(row), 1); row.node.remove(); onchange(); } } }, "Leave it out")) };
    who.input.addEventListener("change", () => { name.node.hidden = who.input.value !== ""; onchange(); });
    for (const f of [number, tag, name]) f.input.addEventListener("input", onchange);
    rows.push(row);
    place.append(row.node);
    number.input.focus();
    onchange();
  }
  const open = h("button", { type: "button", class: "act", "data-name-lock": true, on: { click: add } }, "Name a lock that is on and not shown");
  return {
    node: h("div", { class: "found-locks" }, place, open),
    locks: () => rows.map((r) => ({ point: r.point.input.value, sources: /** @type {any} */ (Object.fromEntries(points))[r.point.input.value]?.sources ?? [], lock: r.number.input.value.trim(), tag: r.tag.input.value.trim(), holder: r.who.input.value, holder_name: r.who.input.value ? people.find((p) => p.value === r.who.input.value)?.label ?? "" : r.name.input.value.trim() })),
    complete: () => rows.every((r) => r.number.input.value.trim() && (r.who.input.value || r.name.input.value.trim())),
  };
}
