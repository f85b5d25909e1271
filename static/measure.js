// Measures again in place: dropping or choosing a file, or changing a setting,
// posts the form as its button would and exchanges what was measured. Without
// it the button does the same.
"use strict";
(() => {
  const form = document.querySelector("form[data-measure]");
  const shown = document.getElementById("measured");
  if (!form || !shown || !window.fetch) return;
  const file = form.querySelector("input[type=file]");
  const text = form.querySelector("textarea");
  const hint = form.querySelector("[data-drop]");
  let running = null;

  const ready = () => file.files.length > 0 || text.value.trim() !== "";

  async function measure(button) {
    if (running) running.abort();
    const mine = running = new AbortController();
    const body = new FormData(form);
    if (button && button.name) body.set(button.name, button.value);
    shown.setAttribute("data-busy", "");
    shown.setAttribute("aria-busy", "true");
    try {
      const answer = await fetch(form.action, { method: "POST", body, signal: mine.signal });
      const page = new DOMParser().parseFromString(await answer.text(), "text/html");
      const fresh = page.getElementById("measured");
      if (running !== mine) return;
      if (!fresh) { // too large, or a fault: show the page that says so
        const main = page.getElementById("main");
        if (main) shown.replaceChildren(...main.childNodes);
        return;
      }
      const open = [...shown.querySelectorAll("details")].map((d) => d.open);
      const labels = [...shown.querySelectorAll("details > summary")].map((s) => s.textContent.trim().split(" of ")[0] + s.textContent.includes("bend"));
      shown.replaceChildren(...fresh.childNodes);
      for (const d of shown.querySelectorAll("details")) {
        const s = d.querySelector("summary").textContent;
        const i = labels.indexOf(s.trim().split(" of ")[0] + s.includes("bend"));
        if (i >= 0) d.open = open[i];
      }
      notes(page);
      say();
    } catch (err) {
      if (err.name !== "AbortError") form.submit();
    } finally {
      if (running === mine) {
        running = null;
        shown.removeAttribute("data-busy");
        shown.removeAttribute("aria-busy");
      }
    }
  }

  // Errors and the defaults in use beside their fields; what is typed stays.
  function notes(page) {
    for (const now of form.querySelectorAll(".field")) {
      const control = now.querySelector("input, select, textarea");
      const then = control && page.getElementById(control.id);
      if (!then) continue;
      for (const e of now.querySelectorAll(".error")) e.remove();
      const error = then.closest(".field").querySelector(".error");
      if (error) now.querySelector(".hint").before(error);
      if (then.getAttribute("aria-invalid")) control.setAttribute("aria-invalid", "true");
      else control.removeAttribute("aria-invalid");
      if (then.placeholder !== undefined && control !== text) control.placeholder = then.placeholder;
    }
  }

  const live = document.createElement("div");
  live.className = "visually-hidden";
  live.setAttribute("role", "status");
  document.body.append(live);
  const say = () => {
    live.textContent = (shown.querySelector(".errors li, .lead")?.textContent || "Measured.").trim().replace(/\s+/g, " ").slice(0, 300);
  };

  form.addEventListener("change", (e) => {
    if (e.target === file && file.files.length) text.value = "";
    if (e.target === text && text.value.trim()) file.value = "";
    if (ready()) measure();
  });
  form.addEventListener("submit", (e) => {
    if (e.submitter && e.submitter.formAction && new URL(e.submitter.formAction).pathname !== new URL(form.action).pathname) return;
    e.preventDefault();
    measure(e.submitter);
  });

  // Dropping a file anywhere on the page.
  let depth = 0;
  const holdsFile = (e) => e.dataTransfer && [...e.dataTransfer.types].includes("Files");
  const over = (on) => hint.classList.toggle("notice", on);
  addEventListener("dragenter", (e) => { if (holdsFile(e)) { depth++; over(true); } });
  addEventListener("dragleave", (e) => { if (holdsFile(e) && --depth <= 0) { depth = 0; over(false); } });
  addEventListener("dragover", (e) => { if (holdsFile(e)) e.preventDefault(); });
  addEventListener("drop", (e) => {
    if (!holdsFile(e) || !e.dataTransfer.files.length) return;
    e.preventDefault();
    depth = 0;
    over(false);
    file.files = e.dataTransfer.files;
    text.value = "";
    measure();
  });
})();
