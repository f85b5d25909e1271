// What the chart paints on its canvas: the same marks, ribbons and lines as
// the drawing without scripts, in the colours of the style sheet.
"use strict";

window.chartDraw = (() => {
  const M = window.chartMap;
  const ribbonAxis = 46, ribbonsFrom = 8, leastLine = 26, waves = 3;

  // Colours by the style sheet's names, read anew for each theme.
  const inks = () => {
    const style = getComputedStyle(document.documentElement);
    const of = (name) => style.getPropertyValue("--" + name).trim();
    const forced = matchMedia("(forced-colors: active)").matches;
    const c = {};
    for (const k of ["paper", "sheet", "wash", "ink", "soft", "rule", "edge", "ochre", "alarm", "focus", "r0", "r1", "r2", "r3", "r4", "r5", "r6"]) c[k] = of(k);
    if (forced) {
      for (const k in c) c[k] = "CanvasText";
      c.paper = c.sheet = c.wash = "Canvas"; c.rule = "GrayText"; c.focus = "Highlight"; c.ochre = "LinkText";
    }
    c.sans = of("sans") || "sans-serif";
    return c;
  };

  // --- ribbons ------------------------------------------------------------------

  const j0 = (x) => { // Bessel's J0 by its series; x stays under 2.4
    let term = 1, sum = 1;
    for (let k = 1; k < 25; k++) { term *= -(x * x) / (4 * k * k); sum += term; }
    return sum;
  };
  const shapes = new Map();
  // The sine-generated curve of sinuosity p = 1/J0(omega) over the axis.
  const ribbon = (p) => {
    const capped = p > 5;
    p = Math.round(Math.min(Math.max(p || 1, 1), 5) * 100) / 100;
    const key = p + (capped ? "+" : "");
    if (shapes.has(key)) return shapes.get(key);
    let lo = 0, hi = 2.4;
    for (let i = 0; i < 60; i++) { const mid = (lo + hi) / 2; if (1 / j0(mid) < p && j0(mid) > 0) lo = mid; else hi = mid; }
    const n = waves * 24, ds = p * ribbonAxis / n, points = [[0, 0]];
    let x = 0, y = 0, half = 0, left = 0, right = 0;
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < 4; j++) {
        const a = lo * Math.cos(2 * Math.PI * (i + (j + 0.5) / 4) / 24);
        x += ds / 4 * Math.cos(a); y -= ds / 4 * Math.sin(a);
      }
      points.push([x, y]);
      half = Math.max(half, Math.abs(y)); left = Math.min(left, x); right = Math.max(right, x);
    }
    const out = { points, half, left, right, capped };
    shapes.set(key, out);
    return out;
  };
  const widthOf = (m) => !(m > 0) ? 1.6 : m < 300 ? 1.6 : m < 1000 ? 2.4 : m < 3000 ? 3.3 : 4.4;

  // --- marks --------------------------------------------------------------------

  const trace = (g, points, close) => {
    points.forEach(([x, y], i) => i ? g.lineTo(x, y) : g.moveTo(x, y));
    if (close) g.closePath();
  };
  const shapeOf = (s) => s.kind === "river" ? "triangle" : s.kind === "lacustrine" ? "square" : s.ancient ? "diamond" : "circle";
  const outlineMark = (g, shape, x, y, r) => {
    g.beginPath();
    if (shape === "circle") g.arc(x, y, r, 0, 2 * Math.PI);
    if (shape === "square") { const s = 0.89 * r; g.rect(x - s, y - s, 2 * s, 2 * s); }
    if (shape === "triangle") { const s = 1.35 * r; trace(g, [[x, y - s], [x + 0.87 * s, y + 0.5 * s], [x - 0.87 * s, y + 0.5 * s]], true); }
    if (shape === "diamond") { const s = 1.3 * r; trace(g, [[x, y - s], [x + s, y], [x, y + s], [x - s, y]], true); }
  };
  // Where very many are in view, marks without a letter shrink.
  const radiusOf = (s, step, many) => step.letter && s.kind !== "river" ? 7 : many ? 4 : 5.5;
  const mark = (g, c, s, step, many) => {
    const river = s.kind === "river", r = radiusOf(s, step, many);
    outlineMark(g, shapeOf(s), s.x, s.y, r);
    g.fillStyle = river ? c.paper : c[step.class];
    g.fill();
    g.lineWidth = river ? 1.75 : 1;
    g.strokeStyle = river ? c.ochre : c.paper;
    g.stroke();
    if (!step.letter) return;
    g.font = "600 10px " + c.sans; g.textAlign = "center"; g.textBaseline = "middle";
    g.fillStyle = river ? c.ink : c.paper;
    g.fillText(step.letter, s.x, s.y + 0.5);
  };
  const stroke = (g, colour, width, dash = []) => { g.strokeStyle = colour; g.lineWidth = width; g.setLineDash(dash); g.stroke(); g.setLineDash([]); };
  const drawRibbon = (g, c, s, step, shape) => {
    const river = s.kind === "river", width = widthOf(s.channel_width_m), colour = river ? c.ochre : c[step.class];
    g.save();
    g.translate(s.x - ribbonAxis / 2, s.y);
    g.beginPath();
    trace(g, shape.points);
    g.lineCap = river ? "butt" : "round"; g.lineJoin = "round";
    if (s.ancient && !river) { stroke(g, colour, width + 2.4); stroke(g, c.paper, 1.7); } else stroke(g, colour, width, river ? [5, 3.5] : []);
    if (shape.capped) { g.beginPath(); trace(g, [[ribbonAxis + 4, -5], [ribbonAxis + 4, 5]]); trace(g, [[ribbonAxis + 7, -5], [ribbonAxis + 7, 5]]); stroke(g, c.alarm, 1.6); }
    g.restore();
    if (step.letter) text(g, c, step.letter, s.x - ribbonAxis / 2 + shape.right + 3, s.y + 4, "left", c.ink, 600);
  };
  const text = (g, c, words, x, y, align, colour, weight = 400) => {
    g.font = weight + " 12.5px " + c.sans; g.textAlign = align; g.textBaseline = "alphabetic";
    g.lineWidth = 3.5; g.lineJoin = "round"; g.strokeStyle = c.paper; g.strokeText(words, x, y);
    g.fillStyle = colour; g.fillText(words, x, y);
  };

  // --- the whole ----------------------------------------------------------------

  // paint draws a state: its projection p, rings, systems (x and y are set
  // here), steps, lines, filter box and what is being selected or pointed at.
  const paint = (g, c, p, state) => {
    g.clearRect(0, 0, p.w, p.h);
    const edge = M.outline(p);
    g.beginPath();
    if (edge) trace(g, edge, true); else g.rect(0, 0, p.w, p.h);
    g.fillStyle = c.sheet; g.fill();
    g.beginPath();
    for (const ring of M.landOnPage(p, state.rings)) trace(g, ring, true);
    g.fillStyle = c.wash; g.fill("nonzero");
    stroke(g, c.edge, 0.7);
    const b = M.bounds(p), steps = M.steps(p, b);
    for (const { line, kind } of M.graticule(p, b, steps)) {
      g.beginPath();
      trace(g, line);
      if (kind === "practice") stroke(g, c.soft, 1, [5, 4]); else stroke(g, kind === "equator" ? c.edge : c.rule, 0.8);
    }
    g.beginPath();
    if (edge) trace(g, edge, true); else g.rect(0.5, 0.5, p.w - 1, p.h - 1);
    stroke(g, c.edge, 1);
    for (const l of M.labels(p, b, steps)) text(g, c, l.text, l.x, l.y, l.anchor, c.soft);
    const box = (limits, width) => { for (const run of M.boxRuns(p, limits)) { g.beginPath(); trace(g, run); stroke(g, c.ochre, width, [7, 5]); } };
    if (state.box) box(state.box, 2);
    if (state.selecting) box(state.selecting, 2.5);
    systems(g, c, p, state);
    const bar = M.scaleBar(p);
    if (bar) {
      const x = p.w - 14 - bar.length, y = p.h - 14;
      g.beginPath();
      trace(g, [[x, y - 4], [x, y], [x + bar.length, y], [x + bar.length, y - 4]]);
      stroke(g, c.ink, 1.5);
      text(g, c, bar.text, x + bar.length / 2, y - 6, "center", c.ink);
    }
  };

  // Where a centreline is long enough to be seen it stands for its system; else
  // a ribbon where the view is close and there is room; else a mark.
  const systems = (g, c, p, state) => {
    state.shown = [];
    for (const s of state.systems) {
      const q = p.at(s.latitude_deg, s.longitude_deg);
      if (!p.shows(s.latitude_deg, s.longitude_deg, q)) continue;
      [s.x, s.y] = q;
      state.shown.push(s);
    }
    const bySlug = new Map(state.systems.map((s) => [s.slug, s])), drawn = new Set();
    for (const l of state.lines) {
      const s = bySlug.get(l.slug);
      if (!s) continue;
      const pts = l.coordinates.filter((v) => !p.hidden(v[1], v[0])).map((v) => p.at(v[1], v[0]));
      const xs = pts.map((v) => v[0]), ys = pts.map((v) => v[1]);
      if (pts.length < 2 || Math.hypot(Math.max(...xs) - Math.min(...xs), Math.max(...ys) - Math.min(...ys)) < leastLine) continue;
      const river = s.kind === "river";
      g.beginPath();
      trace(g, pts);
      g.lineJoin = "round";
      stroke(g, river ? c.ochre : c[state.steps[s.step].class], 2, river ? [5, 3.5] : []);
      g.beginPath();
      g.arc(pts[0][0], pts[0][1], 3.5, 0, 2 * Math.PI);
      g.fillStyle = c.paper; g.fill(); stroke(g, c.ink, 1.5);
      drawn.add(s.slug);
    }
    const near = p.azimuthal && p.view.zoom >= ribbonsFrom, taken = [];
    for (const s of state.shown) {
      const step = state.steps[s.step];
      const shape = ribbon(s.sinuosity);
      const half = Math.max(shape.half, 6) + 3, x0 = s.x - ribbonAxis / 2 + shape.left - 4, x1 = s.x - ribbonAxis / 2 + shape.right + 4;
      const free = near && !drawn.has(s.slug) && !taken.some((t) => t[2] < s.y + half && t[3] > s.y - half && t[0] < x1 && t[1] > x0);
      if (free) { taken.push([x0, x1, s.y - half, s.y + half]); drawRibbon(g, c, s, step, shape); } else mark(g, c, s, step, state.shown.length > 400);
      if (s === state.over || s.slug === state.pointed || state.chosen.includes(s.slug)) { g.beginPath(); g.arc(s.x, s.y, 12, 0, 2 * Math.PI); stroke(g, c.focus, 3); }
    }
  };

  return { inks, paint };
})();
