/**
 * What is said to screen readers: `say` politely (saved), `sayOncePaused` politely when nothing more is typed (verdicts),
 * `alertUser` at once (refusals, a wait that is over).
 */

/** Without a key for so long, typing has paused (own choice: a figure a second is slow typing). */
export const PAUSE_MS = 700;

/** @param {string} where @param {string} text */
function speak(where, text) {
  const region = document.querySelector(`[data-${where}]`);
  if (!region || region.textContent === text) return;
  region.textContent = text;
}
/** @type {ReturnType<typeof setTimeout> | undefined} */
let pause;

/** @param {string} text */
export function say(text) {
  clearTimeout(pause);
  speak("say", text);
}
/** Half a number has a verdict that nobody wants to hear. @param {string} text "" takes back what has not been said yet */
export function sayOncePaused(text) {
  clearTimeout(pause);
  if (text) pause = setTimeout(() => speak("say", text), PAUSE_MS);
}
/** @param {string} text */
export function alertUser(text) {
  speak("alert", "");
  // A region that is emptied and filled in one turn is not spoken again.
  setTimeout(() => speak("alert", text), 30);
}
