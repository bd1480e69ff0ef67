// Light or dark on the desk: what the person chose in this browser, else what their system says. Loaded first, in the
// head, so that no page flashes. The choice is a convenience and may be lost. Buttons: data-theme-switch.

const KEY = "fieldkit-desk-theme";
const root = document.documentElement;

/** @returns {string | null} */
function chosen() {
  try {
    return localStorage.getItem(KEY);
  } catch {
    return null;
  }
}

const system = matchMedia("(prefers-color-scheme: dark)");

function apply() {
  root.dataset.theme = chosen() ?? (system.matches ? "dark" : "light");
  for (const button of document.querySelectorAll("[data-theme-switch]")) {
    button.textContent = root.dataset.theme === "dark" ? "Light" : "Dark";
  }
}

apply();
system.addEventListener("change", apply);
document.addEventListener("DOMContentLoaded", () => {
  apply();
  for (const button of document.querySelectorAll("[data-theme-switch]")) {
    button.addEventListener("click", () => {
      try {
        localStorage.setItem(KEY, root.dataset.theme === "dark" ? "light" : "dark");
      } catch {
        // a browser that keeps nothing still switches for this page
      }
      if (chosen() === null) root.dataset.theme = root.dataset.theme === "dark" ? "light" : "dark";
      else apply();
    });
  }
});
