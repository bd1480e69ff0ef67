/**
 * Press and hold for one second, with bars that fill. Works by finger, mouse, keyboard (hold space or enter) and by a
 * screen reader, whose click has no length: that asks once more instead. Letting go early or sliding off does nothing.
 */
import { h, put } from "./dom.js";
import { alertUser } from "./announce.js";

const BARS = 8;
export const HOLD_MS = 1000;

/**
 * @param {{label: any, small?: string, run: () => void}} spec
 * @returns {{node: HTMLButtonElement, enable: (on: boolean, small?: string) => void}}
 */
export function holdButton(spec) {
  const bars = Array.from({ length: BARS }, () => h("i"));
  const small = h("small", {}, spec.small ?? "Press and hold for one second");
  const node = /** @type {HTMLButtonElement} */ (h("button", { type: "button", class: "hold", "data-hold": true },
    h("span", {}, spec.label, small), h("span", { class: "grip", "aria-hidden": "true" }, bars)));
  let began = 0, frame = 0, asked = Number.NEGATIVE_INFINITY;

  const fill = (/** @type {number} */ share) => bars.forEach((bar, k) => bar.classList.toggle("dn", share * BARS > k));
  const stop = () => { cancelAnimationFrame(frame); began = 0; fill(0); };
  const done = () => { stop(); spec.run(); };
  const tick = () => {
    const share = (performance.now() - began) / HOLD_MS;
    fill(share);
    if (share >= 1) done(); else frame = requestAnimationFrame(tick);
  };
  const start = () => { if (began || node.disabled) return; began = performance.now(); frame = requestAnimationFrame(tick); };

  node.addEventListener("pointerdown", (e) => { if (e.button === 0) { node.setPointerCapture?.(e.pointerId); start(); } });
  node.addEventListener("pointermove", (e) => {
    if (!began) return;
    const box = node.getBoundingClientRect();
    if (e.clientX < box.left || e.clientX > box.right || e.clientY < box.top || e.clientY > box.bottom) stop();
  });
  for (const end of ["pointerup", "pointercancel", "lostpointercapture", "blur"]) node.addEventListener(end, stop);
  node.addEventListener("keydown", (e) => { if (e.key === " " || e.key === "Enter") { e.preventDefault(); if (!e.repeat) start(); } });
  node.addEventListener("keyup", (e) => { if (e.key === " " || e.key === "Enter") { e.preventDefault(); stop(); } });
  node.addEventListener("contextmenu", (e) => e.preventDefault());
  node.addEventListener("click", (e) => {
    // A click of no pointer (it has no count) and no key (prevented above) is an assistive one: the second within four seconds counts as held.
    if (e.detail !== 0) return;
    if (performance.now() - asked < 4000) { asked = Number.NEGATIVE_INFINITY; spec.run(); return; }
    asked = performance.now();
    alertUser("Activate it once more within four seconds to confirm.");
  });

  return { node, enable: (on, text) => { node.disabled = !on; if (!on) stop(); if (text) put(small, text); } };
}
