/** What is said to screen readers: `say` politely (verdicts, saved), `alertUser` at once (refusals, a wait that is over). */

/** @param {string} where @param {string} text */
function speak(where, text) {
  const region = document.querySelector(`[data-${where}]`);
  if (!region || region.textContent === text) return;
  region.textContent = text;
}
/** @param {string} text */
export const say = (text) => speak("say", text);
/** @param {string} text */
export function alertUser(text) {
  speak("alert", "");
  // A region that is emptied and filled in one turn is not spoken again.
  setTimeout(() => speak("alert", text), 30);
}
