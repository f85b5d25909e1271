// Checks a record while it is being typed: sends the form to the same address
// as the button "Check only" and shows what comes back beside the fields that
// hold something. The page works the same without it, one button later.
"use strict";
(() => {
  const form = document.querySelector("form[data-checks]");
  if (!form || !window.fetch) return;
  const touched = new Set();
  // The buttons are named "action" and hide the property of that name.
  const address = form.getAttribute("action");
  let timer = 0, running = null, dirty = false;

  const later = () => {
    clearTimeout(timer);
    timer = setTimeout(check, 600);
  };

  async function check() {
    if (running) running.abort();
    const mine = running = new AbortController();
    const body = new FormData(form);
    body.delete("centreline_file");
    body.delete("centreline");
    body.set("action", "check");
    try {
      const answer = await fetch(address, { method: "POST", body, signal: mine.signal, redirect: "error" });
      if (!answer.ok) return;
      const page = new DOMParser().parseFromString(await answer.text(), "text/html");
      if (running === mine) show(page);
    } catch { /* offline or out of date: the buttons still check */ }
  }

  function show(page) {
    for (const now of form.querySelectorAll(".messages[id]")) {
      const name = now.id.slice(0, -"-messages".length);
      const then = page.getElementById(now.id);
      if (!then || now.contains(document.activeElement)) continue;
      if (!touched.has(name) && !now.childElementCount && then.querySelector(".error")) continue;
      now.replaceChildren(...then.childNodes);
      const control = document.getElementById(name);
      const bad = now.querySelector(":scope > .error");
      if (control) control[bad ? "setAttribute" : "removeAttribute"]("aria-invalid", "true");
      const field = now.closest(".field");
      if (field) field.classList.toggle("wide", !!now.querySelector(".warning") || (control && control.tagName === "TEXTAREA"));
    }
  }

  // A pasted entry fills the source in place; the button does the same by
  // sending the form.
  async function fillSource() {
    const body = new FormData(form);
    body.delete("centreline_file");
    body.set("action", "reference");
    let page;
    try {
      const answer = await fetch(address, { method: "POST", body, redirect: "error" });
      if (!answer.ok) return;
      page = new DOMParser().parseFromString(await answer.text(), "text/html");
    } catch { return; }
    const now = document.getElementById("reference-result"), then = page.getElementById("reference-result");
    if (!now || !then) return;
    const read = !then.querySelector(".error");
    for (const name of read ? ["source", "source_doi"] : []) {
      document.getElementById(name).value = page.getElementById(name).value;
      touched.add(name);
    }
    now.replaceChildren(...then.childNodes);
    if (read) later();
  }
  const reference = document.getElementById("reference");
  if (reference) reference.addEventListener("paste", () => setTimeout(fillSource, 0));

  form.addEventListener("input", () => { dirty = true; });
  form.addEventListener("change", (e) => {
    if (!e.target.name || e.target.name === "message" || e.target.name === "reference" || e.target.type === "file") return;
    touched.add(e.target.name.replace(/\.unit$/, ""));
    later();
  });
  form.addEventListener("submit", () => { dirty = false; });
  // Leaving with something typed asks first.
  addEventListener("beforeunload", (e) => { if (dirty) e.preventDefault(); });
})();
