// Keys of the week page: arrows walk through the scans, "/" goes to the search,
// "?" shows what the keys do. Enter opens a scan by itself: scans are links.
const scans = () => [...document.querySelectorAll(".plot.row a.scan")];

const typing = (e) => e.target.closest?.("input, select, textarea, dialog[open]") || e.ctrlKey || e.metaKey || e.altKey;

// The scan that stands nearest in time in the next row, up or down, that has any.
function acrossRows(from, step) {
  const rows = [...document.querySelectorAll(".plot.row")].filter((r) => r.querySelector("a.scan"));
  const row = rows[rows.indexOf(from.closest(".plot.row")) + step];
  if (!row) return null;
  const centre = (a) => a.querySelector(".bar").getBoundingClientRect().x;
  const x = centre(from);
  return [...row.querySelectorAll("a.scan")].reduce((best, a) => (Math.abs(centre(a) - x) < Math.abs(centre(best) - x) ? a : best));
}

function next(key, at) {
  const all = scans();
  if (!at) return key === "ArrowRight" || key === "ArrowDown" ? all[0] : null;
  switch (key) {
    case "ArrowRight":
      return all[all.indexOf(at) + 1];
    case "ArrowLeft":
      return all[all.indexOf(at) - 1];
    case "ArrowDown":
      return acrossRows(at, 1);
    case "ArrowUp":
      return acrossRows(at, -1);
  }
  return null;
}

document.addEventListener("keydown", (e) => {
  if (typing(e)) return;
  if (e.key === "?") {
    document.getElementById("keys")?.showModal();
  } else if (e.key === "/") {
    const q = document.getElementById("q");
    if (!q) return;
    e.preventDefault();
    q.focus();
  } else if (e.key.startsWith("Arrow")) {
    const at = e.target.closest?.("a.scan");
    // Without a scan in hand arrows scroll as ever: the page, and the rows in
    // focus sideways. From nowhere in particular, right begins with the first.
    if (!at && (e.key !== "ArrowRight" || document.activeElement !== document.body)) return;
    const to = next(e.key, at);
    if (!to) return;
    e.preventDefault();
    to.closest("details")?.setAttribute("open", "");
    to.focus({ preventScroll: true });
    to.scrollIntoView({ block: "nearest", inline: "nearest" });
  }
});

for (const button of document.querySelectorAll("[data-opens]")) {
  button.hidden = false;
  button.addEventListener("click", () => document.getElementById(button.dataset.opens)?.showModal());
}
