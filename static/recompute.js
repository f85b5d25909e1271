// Follows a recomputation that runs: the progress is asked for and shown in
// place, and the result is loaded when it is there. Without scripts the page
// loads itself again every few seconds.
"use strict";
(() => {
  const box = document.querySelector("[data-recompute]");
  if (!box || !window.fetch) return;
  const bar = box.querySelector("progress"), line = box.querySelector("[role=status]");
  let shown = line.textContent;
  const look = async () => {
    try {
      const answer = await fetch("/recompute.json", { headers: { Accept: "application/json" } });
      if (answer.ok) {
        const name = box.dataset.recompute.replace(/^.*\//, "").replace(/\.json$/, "");
        const one = (await answer.json()).recomputations.find((r) => encodeURIComponent(r.name) === name || r.name === name);
        if (one && one.state !== "running") return location.reload();
        if (one) {
          bar.value = one.lines ? one.reached / one.lines : 0;
          const text = `Measuring: ${one.reached} of ${one.lines} lines.`;
          if (text !== shown) line.textContent = shown = text;
        }
      }
    } catch { /* asked again below */ }
    setTimeout(look, 600);
  };
  setTimeout(look, 300);
})();
