// Hands on the chart: dragging, pinching, the wheel, the keys, and selecting a
// box of meridians and parallels, which becomes the filter.
"use strict";

window.chartHands = (api) => {
  const M = window.chartMap, { canvas, root, state } = api;
  const pointers = new Map();
  let grab = null;      // what a drag began with
  let corner = null;    // first corner of a box: {lat, lon, east: degrees gone east so far}
  let boxing = false, moved = false;

  const where = (e) => { const r = canvas.getBoundingClientRect(); return [e.clientX - r.left, e.clientY - r.top]; };
  const setBoxing = (on) => {
    boxing = on; corner = null; state.selecting = null;
    root.classList.toggle("boxing", on);
    api.boxButton.setAttribute("aria-pressed", String(on));
    api.say(on ? "Drag over the map, or press at one corner and then at the opposite one. Escape stops." : "");
    api.redraw();
  };
  api.boxButton.addEventListener("click", () => setBoxing(!boxing));

  // The place under the pointer; off the map, the nearest on its level, or on
  // the nearest level that has one.
  const placeAt = ([x, y]) => {
    const p = api.projection();
    for (let up = 0; p && up <= 1; up += 0.01) {
      for (let along = 0; along <= 1; along += 0.01) {
        const q = p.place(x + along * (p.w / 2 - x), y + up * (p.h / 2 - y));
        if (q) return q;
      }
    }
    return null;
  };

  // The box from the first corner to here; it goes round the way the pointer went.
  const boxTo = (at) => {
    const q = placeAt(at);
    if (!q || !corner) return null;
    const step = M.difference(q[1], corner.at);
    corner.at = q[1];
    corner.east += step;
    const east = Math.min(Math.max(corner.east, -360), 360), lat = [corner.lat, q[0]].sort((a, b) => a - b);
    if (Math.abs(east) >= 360) return [-180, lat[0], 180, lat[1]];
    return east >= 0 ? [M.wrap(corner.lon), lat[0], M.wrap(corner.lon + east), lat[1]] : [M.wrap(corner.lon + east), lat[0], M.wrap(corner.lon), lat[1]];
  };
  const finish = (box) => {
    setBoxing(false);
    if (!box || box[0] === box[2] || box[1] === box[3]) return;
    api.select(box);
  };

  canvas.addEventListener("pointerdown", (e) => {
    if (e.button !== 0 || !api.projection()) return;
    const at = where(e);
    pointers.set(e.pointerId, at);
    canvas.setPointerCapture(e.pointerId);
    moved = false;
    api.hover(null);
    if (pointers.size === 2) { pinchFrom(); corner = null; return; }
    if (boxing || e.shiftKey) {
      if (corner) return; // the second corner of two presses
      const q = placeAt(at);
      if (!boxing) setBoxing(true);
      if (q) corner = { lat: q[0], lon: q[1], at: q[1], east: 0, pressed: at };
      return;
    }
    grab = { at, p: api.projection(), view: { ...api.view() } };
    canvas.classList.add("moving");
  });

  let pinch = null;
  const pinchFrom = () => {
    const [a, b] = [...pointers.values()];
    grab = null;
    pinch = { apart: Math.hypot(a[0] - b[0], a[1] - b[1]), zoom: api.view().zoom };
  };

  canvas.addEventListener("pointermove", (e) => {
    const at = where(e), p = api.projection();
    if (!p) return;
    if (!pointers.has(e.pointerId)) {
      if (corner) { state.selecting = boxTo(at) || state.selecting; api.redraw(); return; }
      api.hover(api.hits(...at, 12)[0] || null);
      canvas.style.cursor = state.over && !boxing ? "pointer" : "";
      return;
    }
    pointers.set(e.pointerId, at);
    if (pinch && pointers.size === 2) {
      const [a, b] = [...pointers.values()];
      const zoom = pinch.zoom * Math.hypot(a[0] - b[0], a[1] - b[1]) / Math.max(pinch.apart, 1);
      api.shift(0, 0, zoom / api.view().zoom, [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2]);
      moved = true;
      return;
    }
    if (corner) {
      state.selecting = boxTo(at) || state.selecting;
      moved = true;
      api.redraw();
      return;
    }
    if (!grab) return;
    const dx = at[0] - grab.at[0], dy = at[1] - grab.at[1];
    if (Math.hypot(dx, dy) < 4 && !moved) return;
    moved = true;
    const q = grab.p.place(grab.p.w / 2 - dx, grab.p.h / 2 - dy), next = { ...grab.view };
    if (grab.p.azimuthal) { if (q) [next.lat, next.lon] = q; } else {
      const under = grab.p.place(...grab.at), perDegree = M.equalEarth(under ? under[0] : 0, 1)[0] * grab.p.r;
      next.lon = M.wrap(grab.view.lon - dx / perDegree);
      const up = grab.p.place(grab.p.w / 2, grab.p.h / 2 - dy);
      if (up && grab.view.zoom > 1) next.lat = up[0];
    }
    api.move(next);
  });

  const lift = (e) => {
    if (!pointers.delete(e.pointerId)) return;
    canvas.classList.remove("moving");
    if (pinch) { if (!pointers.size) pinch = null; grab = null; return; }
    const at = where(e);
    if (corner) {
      // A press without a drag sets the first corner; the next one ends the box.
      if (Math.hypot(at[0] - corner.pressed[0], at[1] - corner.pressed[1]) < 6) { state.selecting = null; return; }
      finish(boxTo(at) || state.selecting);
      return;
    }
    grab = null;
    if (moved) return;
    const found = api.hits(...at, e.pointerType === "touch" ? 18 : 9);
    if (found.length) api.openCard(found); else api.closeCard();
  };
  canvas.addEventListener("pointerup", lift);
  canvas.addEventListener("pointercancel", (e) => { pointers.delete(e.pointerId); grab = pinch = null; canvas.classList.remove("moving"); });
  canvas.addEventListener("pointerleave", () => { if (!pointers.size) api.hover(null); });
  canvas.addEventListener("dblclick", (e) => { if (!boxing) api.shift(0, 0, 2, where(e)); });

  // The wheel scrolls the page unless the map has the focus or Ctrl is held.
  canvas.addEventListener("wheel", (e) => {
    if (!e.ctrlKey && document.activeElement !== canvas) {
      api.say("To zoom with the wheel, hold Ctrl or press on the map first.");
      return;
    }
    e.preventDefault();
    api.shift(0, 0, Math.exp(-Math.sign(e.deltaY) * Math.min(Math.abs(e.deltaY), 120) / 400), where(e));
  }, { passive: false });

  canvas.addEventListener("keydown", (e) => {
    if (e.ctrlKey || e.metaKey || e.altKey) return;
    const by = 0.15;
    const keys = {
      ArrowLeft: () => api.shift(-by, 0), ArrowRight: () => api.shift(by, 0), ArrowUp: () => api.shift(0, by), ArrowDown: () => api.shift(0, -by),
      "+": () => api.shift(0, 0, 1.6), "=": () => api.shift(0, 0, 1.6), "-": () => api.shift(0, 0, 1 / 1.6), 0: () => api.whole(),
      b: () => setBoxing(!boxing),
      Enter: () => {
        const p = api.projection(), found = api.hits(p.w / 2, p.h / 2, Math.hypot(p.w, p.h));
        if (found.length) { api.openCard(found); api.card.querySelector("a")?.focus(); } else api.say("No system is in the view.");
      },
      Escape: () => { if (boxing) setBoxing(false); else api.closeCard(); },
    };
    if (!keys[e.key]) return;
    e.preventDefault();
    keys[e.key]();
  });
};
