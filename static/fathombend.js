// Fathombend's script. Every page works without it.
//
// A form with data-live updates the page in place when one of its controls
// changes: the same GET the form would send, then <main> is exchanged piece by
// piece. Focus, what is being typed, opened details and the scroll position
// stay; the address follows, so back, forward and reload give what is seen.
"use strict";

(() => {
  const main = document.getElementById("main");
  if (!main) return;
  let asked = null; // the request in flight
  let shown = location.pathname + location.search; // the view in front of the reader

  // Address of what the form says now; empty controls are left out.
  const addressOf = (form) => {
    const query = new URLSearchParams();
    for (const [name, value] of new FormData(form)) {
      if (typeof value === "string" && value !== "") query.append(name, value);
    }
    const url = new URL(form.action, location.href);
    url.search = query.toString();
    return url;
  };

  const openDetails = () =>
    [...main.querySelectorAll("details")].map((d) => [d.querySelector("summary")?.textContent.trim().split("\n")[0].trim(), d.open]);

  // A stable name for a control, to find it again in the new page.
  const nameOf = (el) => {
    if (!el || el === document.body || !main.contains(el)) return null;
    if (el.id) return "#" + CSS.escape(el.id);
    if (el.name) {
      let s = el.tagName.toLowerCase() + '[name="' + CSS.escape(el.name) + '"]';
      if (el.type === "checkbox" || el.type === "radio") s += '[value="' + CSS.escape(el.value) + '"]';
      return s;
    }
    return null;
  };

  // A refused question changes nothing but says why, above the form that asked.
  const refuse = (form, fresh) => {
    if (!form) return false;
    form.querySelector(":scope > .errors.in-place")?.remove();
    const p = document.createElement("p");
    p.className = "errors in-place";
    p.setAttribute("role", "alert");
    p.textContent = [...fresh.querySelectorAll("h1 ~ p:not(.small), .errors li")].map((e) => e.textContent.trim().replace(/[^.]$/, "$&.")).join(" ");
    form.prepend(p);
    return true;
  };

  const show = async (url, push, form) => {
    if (asked) asked.abort();
    const mine = (asked = new AbortController());
    main.setAttribute("data-busy", "");
    main.setAttribute("aria-busy", "true");
    try {
      const answer = await fetch(url, { signal: mine.signal, headers: { Accept: "text/html", "X-Requested-By": "page" } });
      const page = new DOMParser().parseFromString(await answer.text(), "text/html");
      const fresh = page.getElementById("main");
      if (!fresh) throw new Error("no page");
      if (!answer.ok && refuse(form, fresh)) return;
      const focused = document.activeElement;
      const focus = nameOf(focused);
      const caret = focused && "selectionStart" in focused ? [focused.selectionStart, focused.selectionEnd] : null;
      const was = new Map(openDetails());
      main.replaceChildren(...fresh.childNodes);
      document.title = page.title;
      for (const d of main.querySelectorAll("details")) {
        const name = d.querySelector("summary")?.textContent.trim().split("\n")[0].trim();
        if (was.get(name)) d.open = true;
      }
      // The frame's links to the same view as data follow.
      const foot = document.querySelector("footer.site"), newFoot = page.querySelector("footer.site");
      if (foot && newFoot) foot.replaceChildren(...newFoot.childNodes);
      if (push) history.pushState({ live: true }, "", answer.url);
      shown = location.pathname + location.search;
      const again = focus && main.querySelector(focus);
      if (again) {
        again.focus({ preventScroll: true });
        try { if (caret && caret[0] !== null) again.setSelectionRange(...caret); } catch { /* not a text control */ }
      }
      say(main.querySelector(".lead, .errors")?.textContent);
      // A long fit answers with its progress: ask again.
      if (main.querySelector("[data-working]")) {
        const here = location.href;
        setTimeout(() => { if (location.href === here && !asked) show(url, false); }, 700);
      }
    } catch (err) {
      if (err.name === "AbortError") return;
      location.assign(url); // let the browser show what went wrong
      return;
    } finally {
      if (asked === mine) {
        asked = null;
        main.removeAttribute("data-busy");
        main.removeAttribute("aria-busy");
      }
    }
  };

  // One polite region tells a screen reader what changed.
  const live = document.createElement("div");
  live.className = "visually-hidden";
  live.setAttribute("role", "status");
  document.body.append(live);
  const say = (text) => { live.textContent = (text || "The page was updated.").trim().slice(0, 300); };

  const isLive = (form) => form && form.matches && form.matches("form[data-live]") && (form.method || "get") === "get";
  let wait = 0;
  main.addEventListener("change", (e) => {
    const form = e.target.form;
    if (!isLive(form)) return;
    clearTimeout(wait);
    // Checkboxes are often ticked in a row; wait for the hand to rest.
    wait = setTimeout(() => { if (form.reportValidity()) show(addressOf(form), true, form); }, e.target.type === "checkbox" ? 350 : 0);
  });
  main.addEventListener("submit", (e) => {
    // A button that posts keeps what is typed out of addresses: never a GET.
    if (e.submitter && e.submitter.formMethod === "post") return;
    if (!isLive(e.target) || (e.submitter && e.submitter.formAction && new URL(e.submitter.formAction).pathname !== new URL(e.target.action).pathname)) return;
    e.preventDefault();
    clearTimeout(wait);
    show(addressOf(e.target), true, e.target);
  });
  // Going to a place on the same page (#field) is a popstate too, and must not
  // take away what is typed there.
  addEventListener("popstate", () => { if (location.pathname + location.search !== shown) show(location.href, false); });
  if (document.querySelector("form[data-live]")) history.replaceState({ live: true }, "", location.href);

  // What a part that is opened needs, fetched when it is opened.
  document.addEventListener("toggle", (e) => {
    const address = e.target.open && e.target.dataset?.script;
    if (!address || document.querySelector(`script[src="${address}"]`)) return;
    const s = document.createElement("script");
    s.src = address;
    document.head.append(s);
  }, true);

  // Copy a table as tab-separated text.
  document.addEventListener("click", async (e) => {
    const button = e.target.closest("button[data-copy]");
    if (!button) return;
    const table = document.getElementById(button.dataset.copy);
    if (!table) return;
    const text = [...table.rows].map((r) => [...r.cells].map((c) => c.innerText.replace(/\s+/g, " ").trim()).join("\t")).join("\n");
    try {
      await navigator.clipboard.writeText(text + "\n");
      say("The table was copied.");
      button.textContent = "Copied";
      setTimeout(() => { button.textContent = "Copy as TSV"; }, 2000);
    } catch {
      say("The browser did not allow copying; select the table instead.");
    }
  });
})();
