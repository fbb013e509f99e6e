// The chosen theme, before anything is painted: a classic script in the head.
(() => {
  "use strict";
  const key = "cadencewright-theme";
  const order = ["auto", "light", "dark"];
  let theme = "auto";
  try {
    theme = localStorage.getItem(key) || "auto";
  } catch {
    // Storage can be refused; the switch then lasts for the page.
  }
  const apply = () => {
    if (theme === "auto") delete document.documentElement.dataset.theme;
    else document.documentElement.dataset.theme = theme;
    const button = document.getElementById("theme");
    if (button) {
      button.hidden = false;
      button.textContent = "Theme: " + theme;
    }
  };
  if (!order.includes(theme)) theme = "auto";
  apply();
  document.addEventListener("DOMContentLoaded", () => {
    apply();
    document.getElementById("theme")?.addEventListener("click", () => {
      theme = order[(order.indexOf(theme) + 1) % order.length];
      try {
        localStorage.setItem(key, theme);
      } catch {
        // see above
      }
      apply();
    });
  });
})();
