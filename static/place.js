// A map to click for a place: it writes latitude and longitude into two fields
// of the form, which stay the place that is sent. Keys: arrows move the cross,
// with Shift by less, plus and minus change the view. The map is loaded when it
// is opened for the first time; the fields work without it.
"use strict";
(() => {
  const pickers = new WeakMap();
  const once = {};
  const load = (address) => once[address] ||= new Promise((done, failed) => {
    const s = document.createElement("script");
    s.src = address;
    s.onload = done;
    s.onerror = () => { delete once[address]; failed(new Error("not loaded")); };
    document.head.append(s);
  });
  const outlines = (address) => once[address] ||= fetch(address).then((a) => { if (!a.ok) throw new Error(a.status); return a.json(); })
    .catch((e) => { delete once[address]; throw e; });

  const opened = (root) => {
    if (!(root instanceof HTMLDetailsElement) || !root.matches(".place-picker") || !root.open || pickers.has(root)) return;
    const says = root.querySelector("[role=status]");
    pickers.set(root, null);
    Promise.all([window.chartMap ? null : load(root.dataset.map), outlines(root.dataset.land)])
      .then(([, land]) => pickers.set(root, picker(root, window.chartMap.ringsOf(land), says)))
      .catch(() => { pickers.delete(root); says.textContent = "The map could not be loaded. Close and open it to try again, or type the place."; });
  };
  // The listener stands on the document, so that a form put in place anew needs
  // nothing of its own. This script is fetched when the first map is opened.
  document.addEventListener("toggle", (e) => opened(e.target), true);
  document.querySelectorAll(".place-picker[open]").forEach(opened);

  function picker(root, coarse, says) {
    const M = window.chartMap;
    const canvas = root.querySelector("canvas"), g = canvas.getContext("2d");
    const [latField, lonField] = [root.dataset.lat, root.dataset.lon].map((id) => document.getElementById(id));
    const view = { name: "world", lat: 0, lon: 0, zoom: 1 };
    let rings = coarse, fine = false, at = null, p = null;

    // A cell in degrees and minutes is left to the form to read.
    const number = (field) => { const t = field.value.trim(); return t !== "" && Number.isFinite(+t) ? +t : NaN; };
    const typed = () => {
      const lat = number(latField), lon = number(lonField);
      return Math.abs(lat) <= 90 && lon >= -180 && lon <= 360 ? [lat, M.wrap(lon)] : null;
    };
    const look = () => { if (at) [view.lat, view.lon] = at; };
    const text = ([lat, lon]) => M.latText(lat) + ", " + M.lonText(lon);
    // As many decimals as a pixel of this view can tell apart.
    const digits = () => Math.min(Math.max(Math.ceil(Math.log10(p.r * Math.PI / 180)), 1), 5);

    const inks = () => {
      const style = getComputedStyle(document.documentElement), of = (n) => style.getPropertyValue("--" + n).trim();
      if (matchMedia("(forced-colors: active)").matches) return { sheet: "Canvas", wash: "Canvas", edge: "CanvasText", rule: "GrayText", soft: "CanvasText", cross: "Highlight", sans: of("sans") };
      return { sheet: of("sheet"), wash: of("wash"), edge: of("edge"), rule: of("rule"), soft: of("soft"), cross: of("alarm"), sans: of("sans") };
    };
    const trace = (points, close) => {
      points.forEach(([x, y], i) => i ? g.lineTo(x, y) : g.moveTo(x, y));
      if (close) g.closePath();
    };

    function draw() {
      const w = canvas.clientWidth, h = canvas.clientHeight, sharp = window.devicePixelRatio || 1, c = inks();
      if (!w || !h) return;
      if (canvas.width !== Math.round(w * sharp) || canvas.height !== Math.round(h * sharp)) { canvas.width = Math.round(w * sharp); canvas.height = Math.round(h * sharp); }
      p = M.project(view, w, h);
      if (p.r > 900 && !fine) outlines(root.dataset.fine).then((a) => { rings = M.ringsOfDifferences(a); fine = true; draw(); }).catch(() => { fine = false; });
      g.setTransform(sharp, 0, 0, sharp, 0, 0);
      g.clearRect(0, 0, w, h);
      const edge = M.outline(p);
      g.fillStyle = c.sheet;
      if (edge) { g.beginPath(); trace(edge, true); g.fill(); } else g.fillRect(0, 0, w, h);
      g.beginPath();
      for (const ring of M.landOnPage(p, rings)) trace(ring, true);
      g.fillStyle = c.wash; g.fill();
      g.strokeStyle = c.edge; g.lineWidth = .7; g.stroke();
      const b = M.bounds(p), steps = M.steps(p, b);
      g.lineWidth = .8;
      for (const { line, kind } of M.graticule(p, b, steps)) { g.strokeStyle = kind === "equator" ? c.edge : c.rule; g.beginPath(); trace(line); g.stroke(); }
      g.font = "13px " + c.sans; g.fillStyle = c.soft;
      for (const t of M.labels(p, b, steps)) { g.textAlign = t.anchor; g.fillText(t.text, t.x, t.y); }
      if (at && p.shows(...at)) {
        const [x, y] = p.at(...at);
        g.strokeStyle = c.cross; g.lineWidth = 2;
        g.beginPath();
        g.arc(x, y, 7, 0, 2 * Math.PI);
        for (const [dx, dy] of [[1, 0], [-1, 0], [0, 1], [0, -1]]) { g.moveTo(x + 3 * dx, y + 3 * dy); g.lineTo(x + 15 * dx, y + 15 * dy); }
        g.stroke();
      }
    }

    // put takes a place: into the fields, as if it were typed.
    function put([lat, lon]) {
      const d = digits();
      at = [+lat.toFixed(d), +M.wrap(lon).toFixed(d)];
      for (const [field, v] of [[latField, at[0]], [lonField, at[1]]]) {
        field.value = String(v === 0 ? 0 : v);
        for (const kind of ["input", "change"]) field.dispatchEvent(new Event(kind, { bubbles: true }));
      }
      says.textContent = text(at);
    }
    function zoom(by) {
      view.zoom = Math.min(Math.max(view.zoom * by, 1), M.maxZoom);
      look();
      if (view.zoom === 1) view.lat = 0;
      draw();
    }
    function move(dx, dy) {
      const from = at && p.shows(...at) ? at : [view.lat, view.lon], [x, y] = p.at(...from), to = p.place(x + dx, y + dy);
      if (!to) return;
      put(to);
      const [nx, ny] = p.at(...at);
      if (nx < 20 || ny < 20 || nx > p.w - 20 || ny > p.h - 20) look();
      draw();
    }

    canvas.addEventListener("click", (e) => {
      const box = canvas.getBoundingClientRect(), to = p.place(e.clientX - box.left, e.clientY - box.top);
      if (!to || p.hidden(...to)) return;
      put(to);
      draw();
    });
    canvas.addEventListener("keydown", (e) => {
      const step = e.shiftKey ? 1 : 12, ways = { ArrowLeft: [-step, 0], ArrowRight: [step, 0], ArrowUp: [0, -step], ArrowDown: [0, step] };
      if (e.ctrlKey || e.metaKey || e.altKey) return;
      if (ways[e.key]) move(...ways[e.key]);
      else if (e.key === "+" || e.key === "=") zoom(2);
      else if (e.key === "-") zoom(1 / 2);
      else return;
      e.preventDefault();
    });
    for (const b of root.querySelectorAll("button[data-zoom]")) b.addEventListener("click", () => zoom(+b.dataset.zoom));
    const follow = (e) => {
      if (!e.isTrusted) return; // our own
      at = typed();
      says.textContent = at ? text(at) : "";
      if (at && !p.shows(...at)) look();
      draw();
    };
    for (const field of [latField, lonField]) field.addEventListener("input", follow);
    new ResizeObserver(draw).observe(canvas);
    matchMedia("(prefers-color-scheme: dark)").addEventListener("change", draw);

    at = typed();
    if (at) { view.zoom = 8; look(); says.textContent = text(at); }
    draw();
    return { draw };
  }
})();
