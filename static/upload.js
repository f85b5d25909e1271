// Follows the check of a file: the progress is asked for and shown in place,
// and the result is loaded when it is there. Without scripts the page loads
// itself again every few seconds.
"use strict";
(() => {
  const box = document.querySelector("[data-upload]");
  if (!box || !window.fetch) return;
  const bar = box.querySelector("progress"), line = box.querySelector("[role=status]");
  let shown = line.textContent;
  const look = async () => {
    try {
      const answer = await fetch(box.dataset.upload, { headers: { Accept: "application/json" } });
      if (answer.ok) {
        const now = await answer.json();
        if (now.state !== "checking") return location.reload();
        bar.value = now.fraction;
        const text = `${now.rows} of ${now.all} rows checked.`;
        if (text !== shown) line.textContent = shown = text;
      }
    } catch { /* asked again below */ }
    setTimeout(look, 500);
  };
  setTimeout(look, 300);
})();
