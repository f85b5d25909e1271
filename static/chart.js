// The map that moves. The page is complete without it: this puts a canvas over
// the drawing, and every state it reaches is an address that the server draws
// the same way.
"use strict";

(() => {
  const M = window.chartMap, D = window.chartDraw, main = document.getElementById("main");
  if (!M || !D || !main) return;
  const fetched = new Map(); // answers by address
  // The page of a system, of the release that the address names.
  const systemAddress = (slug) => {
    const release = new URLSearchParams(location.search).get("release");
    return "/systems/" + encodeURIComponent(slug) + (release ? "?release=" + encodeURIComponent(release) : "");
  };
  const get = (address) => {
    if (!fetched.has(address)) {
      fetched.set(address, fetch(address).then((r) => { if (!r.ok) throw new Error(r.status); return r.json(); }).catch((e) => { fetched.delete(address); throw e; }));
    }
    return fetched.get(address);
  };
  const tidy = (view) => {
    const d = 10 ** (Math.ceil(Math.log10(view.zoom)) + 1);
    return { ...view, lat: Math.round(view.lat * d) / d, lon: Math.round(M.wrap(view.lon) * d) / d, zoom: Number(view.zoom.toPrecision(4)) };
  };
  const whole = (name) => ({ name, lat: name === "north" ? 90 : name === "south" ? -90 : 0, lon: 0, zoom: 1 });
  const isWhole = (v) => v.zoom === 1 && (v.name !== "world" || (v.lon === 0 && v.lat === 0));
  let last = null;        // what the map before this one knew: redraws need no wait
  let hadFocus = false;

  const mount = (root) => {
    const num = (s) => s.split(",").map(Number);
    const [lat, lon] = num(root.dataset.at);
    let view = { name: root.dataset.view, lat, lon, zoom: Number(root.dataset.zoom) };
    const state = { rings: [], systems: [], steps: [], lines: [], box: root.dataset.box ? num(root.dataset.box) : null, selecting: null, over: null, pointed: null, chosen: [], shown: [], fine: false };
    if (last) Object.assign(state, { rings: last.rings, fine: last.fine, systems: last.systems, steps: last.steps, lines: last.lines });
    last = state;
    const canvas = document.createElement("canvas"), g = canvas.getContext("2d");
    canvas.id = "chart-canvas";
    canvas.tabIndex = 0;
    canvas.setAttribute("role", "application");
    canvas.setAttribute("aria-label", "Map. Arrow keys move it, plus and minus zoom, 0 shows the whole, Enter lists the systems nearest to the centre. The list beside it holds the systems in view.");
    canvas.setAttribute("aria-describedby", "chart-says");
    root.append(canvas);
    const byId = (id) => document.getElementById(id);
    const says = byId("chart-says"), list = byId("chart-list"), boxButton = byId("chart-box"), takeButton = byId("chart-take");
    boxButton.hidden = takeButton.hidden = false;
    let loaded = false, colours = D.inks(), p = null, due = false, settleTimer = 0, begun = false, linesFor = null;

    const size = () => {
      const w = root.clientWidth, h = root.clientHeight, k = Math.min(devicePixelRatio || 1, 3);
      if (canvas.width !== Math.round(w * k) || canvas.height !== Math.round(h * k)) { canvas.width = Math.round(w * k); canvas.height = Math.round(h * k); }
      g.setTransform(k, 0, 0, k, 0, 0);
      return [w, h];
    };
    const paint = () => {
      due = false;
      if (!root.isConnected) return;
      const [w, h] = size();
      if (!w || !h || !state.rings.length) return;
      p = M.project(view, w, h);
      D.paint(g, colours, p, state);
      root.classList.add("drawn");
      if (!begun && loaded) { begun = true; fillList(); loadClose(); }
    };
    const redraw = () => { if (!due) { due = true; requestAnimationFrame(paint); } };
    const say = (text) => { says.textContent = text; };

    // --- the state as an address ---
    const withView = (address) => {
      const url = new URL(address, location.href), q = url.searchParams;
      for (const k of ["view", "at", "zoom"]) q.delete(k);
      if (view.name !== "world") q.set("view", view.name);
      if (!isWhole(view)) { q.set("at", view.lat + "," + view.lon); q.set("zoom", view.zoom); }
      return url;
    };
    const settle = () => {
      if (!root.isConnected) return;
      history.replaceState({ live: true }, "", withView(location.href));
      byId("c-at").value = isWhole(view) ? "" : view.lat + "," + view.lon;
      byId("c-zoom").value = isWhole(view) ? "" : view.zoom;
      for (const a of root.parentElement.querySelectorAll(".figure-links a")) a.href = withView(a.href);
      byId("chart-projection").textContent = root.dataset["p" + (p && p.azimuthal && !p.polar ? "Near" : view.name[0].toUpperCase() + view.name.slice(1))];
      canvas.style.touchAction = view.zoom > 1 ? "none" : "";
      fillList();
      loadClose();
    };
    const move = (next) => {
      view = tidy({ ...next, zoom: Math.min(Math.max(next.zoom, 1), M.maxZoom) });
      if (view.zoom === 1) view = { ...whole(view.name), lon: view.name === "world" ? view.lon : 0 };
      closeCard();
      redraw();
      clearTimeout(settleTimer);
      settleTimer = setTimeout(settle, 220);
    };
    // By a share of the frame right and up, and a factor about a page position.
    const shift = (right, up, zoom = 1, at = null) => {
      if (!p) return;
      const next = { ...view };
      if (right || up) {
        const q = p.place(p.w * (0.5 + right), p.h * (0.5 - up));
        if (q) [next.lat, next.lon] = q; else if (!p.azimuthal) next.lon = M.wrap(view.lon + right * p.w / p.r * 180 / Math.PI);
      }
      next.zoom = Math.min(Math.max(view.zoom * zoom, 1), M.maxZoom);
      const under = at && p.place(...at);
      if (under && next.zoom > 1) { // what is under the pointer stays there
        for (let i = 0; i < 3; i++) {
          const t = M.project(next, p.w, p.h), [x, y] = t.at(...under), c = t.place(p.w / 2 + x - at[0], p.h / 2 + y - at[1]);
          if (!c) break;
          [next.lat, next.lon] = c;
        }
      }
      move(next);
    };

    // --- what the map needs ---
    if (!state.rings.length) get(root.dataset.land).then((f) => { if (!state.fine) state.rings = M.ringsOf(f); redraw(); })
      .catch(() => say("The outline of the land could not be loaded. Reload the page to try again."));
    get(root.dataset.json).then((a) => { state.systems = a.systems; state.steps = a.steps; loaded = true; redraw(); })
      .catch(() => say("The systems could not be loaded. Reload the page to try again; the table and the list hold them."));
    const loadClose = () => {
      if (!p) return;
      if (p.r > 900 && !state.fine) get(root.dataset.fine).then((a) => { state.rings = M.ringsOfDifferences(a); state.fine = true; redraw(); }).catch(() => { /* the coarse one stays */ });
      if (!p.azimuthal || view.zoom < M.near) return;
      const box = M.viewBox(p).map((v) => M.tidy(v, 1e4));
      const url = new URL(root.dataset.lines, location.href);
      url.searchParams.set("in", box.join(","));
      const address = url.pathname + url.search;
      if (address === linesFor) return;
      linesFor = address;
      get(address).then((a) => {
        if (linesFor !== address) return;
        state.lines = a.lines;
        redraw();
        if (a.more > 0) say(a.more + " more centrelines lie in this view; move closer to see them.");
      }).catch(() => { linesFor = null; });
    };

    // --- the list beside ---
    const fillList = () => {
      if (!p || !state.systems.length) return;
      const seen = new Set(state.shown.map((s) => s.slug)), count = byId("chart-list-count");
      if (list.children.length < state.systems.length && !list.contains(document.activeElement)) {
        // The page brought only a part of a long list: list what is in view.
        list.replaceChildren(...state.shown.toSorted((a, b) => b.latitude_deg - a.latitude_deg).slice(0, 500).map((s) => {
          const li = document.createElement("li"), a = document.createElement("a"), more = document.createElement("span"), b = document.createElement("b");
          a.href = systemAddress(s.slug); a.dataset.slug = s.slug; a.textContent = s.name;
          b.textContent = s.sinuosity === null ? "–" : s.sinuosity.toFixed(2);
          more.className = "small"; more.append(b, " " + words(s));
          li.append(a, " ", more);
          return li;
        }));
      }
      for (const li of list.children) li.hidden = !seen.has(li.firstElementChild.dataset.slug);
      const listed = [...list.children].filter((li) => !li.hidden).length;
      count.textContent = seen.size + " of " + state.systems.length + " in the view" + (listed < seen.size ? "; " + listed + " of them listed here, the rest in the table." : ".");
    };
    list.addEventListener("focusin", (e) => { state.pointed = e.target.dataset.slug || null; redraw(); });
    list.addEventListener("focusout", () => { state.pointed = null; redraw(); });
    list.addEventListener("pointerover", (e) => { state.pointed = e.target.closest("li")?.firstElementChild.dataset.slug || null; redraw(); });
    list.addEventListener("pointerleave", () => { state.pointed = null; redraw(); });

    // --- pointing at systems ---
    const tip = document.createElement("div");
    tip.className = "chart-tip"; tip.hidden = true; tip.setAttribute("aria-hidden", "true");
    const card = document.createElement("div");
    card.className = "chart-card"; card.hidden = true; card.setAttribute("role", "region"); card.setAttribute("aria-label", "Systems at this place");
    root.append(tip);
    root.after(card);
    const hits = (x, y, reach) => state.shown.map((s) => [Math.hypot(s.x - x, s.y - y), s]).filter(([d]) => d <= reach).sort((a, b) => a[0] - b[0]).map((h) => h[1]);
    const hover = (s) => {
      if (s !== state.over) { state.over = s; redraw(); }
      tip.hidden = !s;
      if (!s) return;
      tip.textContent = s.name + " " + (s.sinuosity === null ? "" : s.sinuosity.toFixed(2));
      tip.style.left = Math.min(Math.max(s.x - tip.offsetWidth / 2, 0), p.w - tip.offsetWidth) + "px";
      tip.style.top = (s.y > 44 ? s.y - 40 : s.y + 16) + "px";
    };
    const closeCard = () => { if (!card.hidden) { card.hidden = true; card.replaceChildren(); state.chosen = []; redraw(); } };
    const words = (s) => {
      const out = [Math.abs(s.latitude_deg).toFixed(1) + "° " + (s.latitude_deg < 0 ? "S" : "N") + " " + Math.abs(s.longitude_deg).toFixed(1) + "° " + (s.longitude_deg < 0 ? "W" : "E")];
      if (s.kind !== "submarine") out.push(s.kind);
      if (s.ancient && s.age_ma !== null) out.push(s.age_ma + " Ma" + (s.palaeolatitude_deg === null ? "" : ", palaeolatitude " + M.latText(Math.round(s.palaeolatitude_deg * 10) / 10)));
      if (s.valley_slope !== null) out.push("slope " + Number(s.valley_slope.toPrecision(2)));
      if (s.channel_width_m !== null) out.push(Number(s.channel_width_m.toPrecision(3)) + " m wide");
      out.push(s.grade);
      if (s.invented) out.push("invented");
      return out.join(", ");
    };
    const openCard = (found) => {
      const close = document.createElement("button");
      close.type = "button"; close.textContent = "×"; close.setAttribute("aria-label", "Close");
      close.addEventListener("click", () => { closeCard(); canvas.focus(); });
      const ul = document.createElement("ul");
      for (const s of found.slice(0, 8)) {
        const li = document.createElement("li"), a = document.createElement("a"), more = document.createElement("div");
        a.href = systemAddress(s.slug);
        a.textContent = s.name + (s.sinuosity === null ? "" : ", " + s.sinuosity.toFixed(2) + " (" + s.sinuosity_kind + ")");
        more.className = "small"; more.textContent = words(s);
        li.append(a, more); ul.append(li);
      }
      if (found.length > 8) { const li = document.createElement("li"); li.className = "small"; li.textContent = "and " + (found.length - 8) + " more here; move closer."; ul.append(li); }
      card.replaceChildren(close, ul);
      card.hidden = false; tip.hidden = true;
      state.chosen = found.slice(0, 8).map((s) => s.slug);
      redraw();
      say(found.length === 1 ? found[0].name + "." : found.length + " systems here.");
    };

    const api = { root, canvas, view: () => view, projection: () => p, redraw, move, shift, hits, hover, openCard, closeCard, card, say, state, whole: () => move(whole(view.name)), boxButton,
      select: (box) => { const field = byId("f-bbox"); field.value = box ? box.map((v) => M.tidy(v, 1e4)).join(",") : ""; field.dispatchEvent(new Event("change", { bubbles: true })); } };
    window.chartHands(api);
    takeButton.addEventListener("click", () => { if (p) api.select(M.viewBox(p)); });
    for (const a of root.parentElement.querySelectorAll(".chart-steps a")) {
      a.addEventListener("click", (e) => {
        if (e.ctrlKey || e.metaKey || e.shiftKey || e.button !== 0) return;
        e.preventDefault();
        const by = { in: [0, 0, 2], out: [0, 0, 0.5], west: [-0.3, 0], east: [0.3, 0], north: [0, 0.3], south: [0, -0.3] }[a.dataset.step];
        if (by) shift(...by); else move(whole(view.name));
      });
    }
    const again = () => { colours = D.inks(); redraw(); };
    for (const q of ["(prefers-color-scheme: dark)", "(forced-colors: active)", "(prefers-contrast: more)"]) matchMedia(q).addEventListener("change", again);
    new ResizeObserver(redraw).observe(root);
    document.fonts?.ready.then(redraw);
    canvas.addEventListener("focus", () => { hadFocus = true; });
    canvas.addEventListener("blur", () => { if (canvas.isConnected) hadFocus = false; });
    if (hadFocus) canvas.focus({ preventScroll: true });
    redraw();
  };

  const find = () => { const root = document.getElementById("chart-map"); if (root && !document.getElementById("chart-canvas")) mount(root); };
  addEventListener("DOMContentLoaded", find);
  if (document.readyState !== "loading") find();
  new MutationObserver(find).observe(main, { childList: true });
})();
