/** Picture: taken with the tablet's camera, kept in the run under its own hash before the event says so. */
import { h, part, put } from "../dom.js";
import { acting, reasonList } from "../acting.js";
import { lower } from "../words.js";

/** @param {any} ctx @param {{l: HTMLElement, r: HTMLElement}} el */
export function mount(ctx, el) {
  const file = /** @type {HTMLInputElement} */ (el.l.querySelector("[data-field=picture] input"));
  const note = /** @type {HTMLInputElement} */ (el.l.querySelector("[data-field=note] input"));
  const wrong = part(el.l, "wrong"), preview = part(el.l, "preview");
  put(part(el.l, "of"), `Show this: ${lower(ctx.step.control.of)}.`);
  note.value = ctx.draft.note ?? "";
  note.addEventListener("input", () => ctx.keep({ note: note.value }));
  let kept = ctx.draft.picture ?? null;
  const act = acting(ctx, { run: record });
  put(part(el.r, "act"), act.node);

  file.addEventListener("change", async () => {
    const taken = file.files?.[0];
    if (!taken) return;
    put(wrong);
    try {
      kept = await ctx.run.picture(taken);
      ctx.keep({ picture: kept });
      showPreview(preview, taken);
    } catch (problem) {
      put(wrong, /** @type {any} */ (problem).says ?? "This picture could not be kept. Take it again.");
    }
    update();
  });

  async function record() {
    const answer = await ctx.answer({ do: "pictured", ...pictureBody(kept), note: note.value.trim() });
    if (answer.refused) put(wrong, answer.refused.says);
  }
  function update() {
    const reasons = ctx.shutReasons();
    put(part(el.r, "reasons"), reasons.length ? reasonList(reasons) : null);
    act.show({ label: kept ? "Record the picture" : "Take the picture first", ready: Boolean(kept), reasons });
  }
  if (kept) put(preview, h("p", { class: "note" }, "A picture is kept for this step and not recorded yet."));
  update();
  return { update };
}

/** What of a kept picture goes into the event. @param {any} kept */
export const pictureBody = (kept) => ({ sha256: kept.sha256, media: kept.media ?? "image/jpeg", width: kept.width, height: kept.height, size: kept.size });

/** Shows the picture that was taken, from the file itself. @param {HTMLElement} node @param {File} file */
export function showPreview(node, file) {
  const reader = new FileReader();
  reader.onload = () => put(node, h("img", { src: String(reader.result), alt: "The picture that was taken" }));
  reader.readAsDataURL(file);
}
