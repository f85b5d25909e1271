// The chart's geometry: the same projections, clipping and graticule as
// views/chart_project.go, chart_land.go and chart_graticule.go draw without
// scripts. Pure: numbers in, numbers out. Degrees on the Earth, pixels on the
// page, radii of the Earth between them.
"use strict";

window.chartMap = (() => {
  const rad = Math.PI / 180;
  const margin = 12, near = 3, maxZoom = 5000, polarEdge = 30, nearCap = 120;
  const e1 = 1.340264, e2 = -0.081106, e3 = 0.000893, e4 = 0.003796; // Equal Earth
  const eeX = 2.7066299836960748, eeY = 1.3173627591574133;
  const clamp = (v, lo, hi) => Math.min(Math.max(v, lo), hi);

  const wrap = (lon) => {
    if (lon > -180 && lon <= 180) return lon;
    lon %= 360;
    return lon <= -180 ? lon + 360 : lon > 180 ? lon - 360 : lon;
  };
  const difference = (lon, lon0) => {
    let d = lon - lon0;
    if (d < -180 || d > 180) { d %= 360; if (d < -180) d += 360; else if (d > 180) d -= 360; }
    return d;
  };
  const arc = (lat1, lon1, lat2, lon2) => {
    const s1 = Math.sin(lat1 * rad), c1 = Math.cos(lat1 * rad), s2 = Math.sin(lat2 * rad), c2 = Math.cos(lat2 * rad);
    const sd = Math.sin((lon2 - lon1) * rad), cd = Math.cos((lon2 - lon1) * rad);
    return Math.atan2(Math.hypot(c2 * sd, c1 * s2 - s1 * c2 * cd), s1 * s2 + c1 * c2 * cd) / rad;
  };

  const equalEarth = (lat, dlon) => {
    const t = Math.asin(Math.sqrt(3) / 2 * Math.sin(lat * rad)), t2 = t * t, t6 = t2 * t2 * t2;
    return [dlon * rad * Math.cos(t) / (Math.sqrt(3) / 2 * (e1 + 3 * e2 * t2 + t6 * (7 * e3 + 9 * e4 * t2))), t * (e1 + e2 * t2 + t6 * (e3 + e4 * t2))];
  };
  const equalEarthInverse = (x, y) => {
    if (Math.abs(y) > eeY) return null;
    let t = y, t2, t6;
    for (let i = 0; i < 12; i++) {
      t2 = t * t; t6 = t2 * t2 * t2;
      const step = (t * (e1 + e2 * t2 + t6 * (e3 + e4 * t2)) - y) / (e1 + 3 * e2 * t2 + t6 * (7 * e3 + 9 * e4 * t2));
      t -= step;
      if (Math.abs(step) < 1e-12) break;
    }
    t2 = t * t; t6 = t2 * t2 * t2;
    const dlon = Math.sqrt(3) / 2 * x * (e1 + 3 * e2 * t2 + t6 * (7 * e3 + 9 * e4 * t2)) / Math.cos(t) / rad;
    return Math.abs(dlon) <= 180 ? [Math.asin(clamp(Math.sin(t) * 2 / Math.sqrt(3), -1, 1)) / rad, dlon] : null;
  };

  // A projection of one view {name, lat, lon, zoom} into a frame of w by h.
  const project = (view, w, h) => {
    const polar = view.name === "north" || view.name === "south";
    const azimuthal = polar || view.zoom >= near;
    const cap = polar ? 90 - polarEdge : nearCap;
    let lat0 = view.lat, lon0 = view.lon, r, cx = 0, cy = 0;
    if (polar) { lat0 = view.name === "north" ? 90 : -90; lon0 = 0; }
    const s0 = Math.sin(lat0 * rad), c0 = Math.cos(lat0 * rad), cosCap = Math.cos(cap * rad), rim = 2 * Math.sin(cap / 2 * rad);

    const flat = (lat, lon, edge = cosCap) => {
      const s = Math.sin(lat * rad), c = Math.cos(lat * rad), sd = Math.sin((lon - lon0) * rad), cd = Math.cos((lon - lon0) * rad);
      const x = c * sd, y = c0 * s - s0 * c * cd, cosc = clamp(s0 * s + c0 * c * cd, -1, 1);
      if (cosc < edge) {
        const d = Math.hypot(x, y);
        return d < 1e-12 ? [0, rim] : [x / d * rim, y / d * rim];
      }
      const k = Math.sqrt(2 / (1 + cosc));
      return [k * x, k * y];
    };
    const flatInverse = (x, y) => {
      const d = Math.hypot(x, y);
      if (d > rim) return null;
      if (d < 1e-15) return [lat0, wrap(lon0)];
      const c = 2 * Math.asin(d / 2), sin = Math.sin(c), cos = Math.cos(c);
      return [Math.asin(clamp(cos * s0 + y * sin * c0 / d, -1, 1)) / rad, wrap(lon0 + Math.atan2(x * sin, d * c0 * cos - y * s0 * sin) / rad)];
    };
    const plane = (lat, lon) => azimuthal ? flat(lat, lon) : equalEarth(lat, difference(lon, lon0));

    if (polar) {
      r = (Math.min(w, h) / 2 - margin) / (2 * Math.sin((90 - polarEdge) / 2 * rad));
      [cx, cy] = plane(view.lat, view.lon);
    } else {
      r = Math.min((w - 2 * margin) / (2 * eeX), (h - 2 * margin) / (2 * eeY));
      if (!azimuthal) {
        const room = Math.max(0, eeY + margin / (r * view.zoom) - h / (2 * r * view.zoom));
        cy = clamp(equalEarth(view.lat, 0)[1], -room, room);
      }
    }
    r *= view.zoom;

    const page = ([x, y]) => [w / 2 + (x - cx) * r, h / 2 - (y - cy) * r];
    const at = (lat, lon) => page(plane(lat, lon));
    const hidden = (lat, lon) => view.name === "north" ? lat < polarEdge : view.name === "south" ? lat > -polarEdge
      : azimuthal && arc(lat, lon, lat0, lon0) > 100;
    const shows = (lat, lon, [x, y] = at(lat, lon)) => x >= 0 && x <= w && y >= 0 && y <= h && !hidden(lat, lon) && (polar || !azimuthal || arc(lat, lon, lat0, lon0) < 90);
    const place = (px, py) => {
      const x = (px - w / 2) / r + cx, y = (h / 2 - py) / r + cy;
      if (azimuthal) return flatInverse(x, y);
      const p = equalEarthInverse(x, y);
      return p && [p[0], wrap(lon0 + p[1])];
    };
    return { view, w, h, r, lat0, lon0, polar, azimuthal, cap, page, at, hidden, shows, place, flat };
  };

  // --- land -----------------------------------------------------------------

  const area = (ring) => ring.reduce((s, [x, y], i) => { const n = ring[(i + 1) % ring.length]; return s + x * n[1] - n[0] * y; }, 0);
  const holds = (ring, [x, y]) => {
    let inside = false;
    for (let i = 0, j = ring.length - 1; i < ring.length; j = i++) {
      const a = ring[i], b = ring[j];
      if ((a[1] > y) !== (b[1] > y) && x < a[0] + (b[0] - a[0]) * (y - a[1]) / (b[1] - a[1])) inside = !inside;
    }
    return inside;
  };
  // Outer rings anticlockwise, holes clockwise: filled by winding number they
  // are right also where one holds the antipode and is turned inside out.
  const ringsOf = (feature) => feature.geometry.coordinates.flatMap((polygon) => polygon.map((closed, k) => {
    const ring = closed.slice(0, -1);
    return (area(ring) > 0) === (k === 0) ? ring : ring.toReversed();
  }));
  const ringsOfDifferences = (list) => list.map((d) => {
    const ring = [];
    for (let i = 0, x = 0, y = 0; i < d.length; i += 2) ring.push([(x += d[i]) / 100, (y += d[i + 1]) / 100]);
    return ring;
  });

  const half = (ring, side) => {
    const out = [];
    for (let i = 0, j = ring.length - 1; i < ring.length; j = i++) {
      const a = ring[j], b = ring[i], sa = side(a), sb = side(b);
      if ((sa < 0) !== (sb < 0)) { const t = sa / (sa - sb); out.push([a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])]); }
      if (sb >= 0) out.push(b);
    }
    return out;
  };
  const frame = (ring, w, h) => {
    for (const side of [(v) => v[0] + 2, (v) => w + 2 - v[0], (v) => v[1] + 2, (v) => h + 2 - v[1]]) {
      ring = half(ring, side);
      if (ring.length < 3) return null;
    }
    return ring;
  };

  // The outlines of the land on the page, to be filled by winding number.
  const landOnPage = (p, rings) => {
    const out = [];
    const keep = (ring, plane) => {
      const cut = frame(ring.map((v) => p.page(plane(v[1], v[0]))), p.w, p.h);
      if (cut) out.push(cut);
    };
    if (p.azimuthal) {
      const antipode = [wrap(p.lon0 + 180), -p.lat0], centre = [wrap(p.lon0), p.lat0];
      let turned = false;
      for (const ring of rings) {
        if (!ring.some((v) => arc(v[1], v[0], p.lat0, p.lon0) < p.cap) && !holds(ring, centre)) continue;
        if (holds(ring, antipode)) turned = !turned;
        keep(ring, (lat, lon) => p.flat(lat, lon));
      }
      if (turned) out.push([[-2, -2], [-2, p.h + 2], [p.w + 2, p.h + 2], [p.w + 2, -2]]);
      return out;
    }
    for (const ring of rings) {
      for (const turn of [-360, 0, 360]) {
        let piece = half(ring.map((v) => [v[0] + turn - p.lon0, v[1]]), (v) => v[0] + 180);
        if (piece.length > 2) piece = half(piece, (v) => 180 - v[0]);
        if (piece.length > 2) keep(piece, equalEarth);
      }
    }
    return out;
  };

  const outline = (p) => {
    const pts = [];
    if (p.polar) for (let k = 0; k <= 120; k++) pts.push(p.page(p.flat(p.lat0 - Math.sign(p.lat0) * (90 - polarEdge), 3 * k, -2)));
    else if (!p.azimuthal) {
      for (let k = 0; k <= 72; k++) pts.push(p.page(equalEarth(-90 + 2.5 * k, 180)));
      for (let k = 0; k <= 72; k++) pts.push(p.page(equalEarth(90 - 2.5 * k, -180)));
    } else return null;
    return frame(pts, p.w, p.h);
  };

  // --- graticule --------------------------------------------------------------

  const bounds = (p) => {
    const b = { south: 90, north: -90, lon0: -180, span: 360 };
    let west = 0, east = 0;
    const n = 24;
    for (let i = 0; i <= n; i++) for (let j = 0; j <= n; j++) {
      const q = p.place(p.w * i / n, p.h * j / n);
      if (!q) continue;
      b.south = Math.min(b.south, q[0]); b.north = Math.max(b.north, q[0]);
      const d = difference(q[1], p.view.lon);
      west = Math.min(west, d); east = Math.max(east, d);
    }
    if (p.azimuthal) for (const pole of [90, -90]) if (p.shows(pole, p.view.lon)) {
      b.south = Math.min(b.south, pole); b.north = Math.max(b.north, pole);
      return b;
    }
    if (p.azimuthal && east - west < 300) { b.lon0 = p.view.lon + west; b.span = east - west; }
    return b;
  };
  // The box of meridians and parallels that holds a view: west, south, east, north.
  const viewBox = (p) => {
    const n = 60, b = bounds(p), edge = p.view.name === "north" ? [polarEdge, 90] : p.view.name === "south" ? [-90, -polarEdge] : [-90, 90];
    let { south, north } = b, off = false;
    for (let i = 0; i <= n; i++) for (const [px, py] of [[0, i / n], [1, i / n], [i / n, 0], [i / n, 1]]) {
      const q = p.place(p.w * px, p.h * py);
      if (!q) off = true; else { south = Math.min(south, q[0]); north = Math.max(north, q[0]); }
    }
    if (p.polar && off) { if (p.lat0 > 0) south = polarEdge; else north = -polarEdge; }
    if (!p.azimuthal) { if (!p.place(p.w / 2, 0)) north = 90; if (!p.place(p.w / 2, p.h)) south = -90; }
    let west = b.lon0, span = b.span;
    if (!p.azimuthal && !off) {
      const d = [0, 1].flatMap((px) => Array.from({ length: n + 1 }, (_, i) => difference(p.place(p.w * px, p.h * i / n)[1], p.lon0)));
      west = p.lon0 + Math.min(...d); span = Math.max(...d) - Math.min(...d);
    }
    const round = span >= 359;
    return [round ? -180 : wrap(west), clamp(south, ...edge), round ? 180 : wrap(west + span), clamp(north, ...edge)];
  };
  const degreeStep = (d) => [0.0005, 0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 15].find((s) => d <= s) || 30;
  const steps = (p, b) => {
    const room = Math.min(95, p.w / 4);
    if (!p.azimuthal) return [15, 30];
    const lat = degreeStep(room / p.r / rad);
    if (p.polar) return [Math.min(lat, 15), 30];
    return [lat, degreeStep(room / p.r / rad / Math.max(Math.cos(Math.min(Math.abs(b.north), Math.abs(b.south)) * rad), 0.05))];
  };
  const graticule = (p, b, [latStep, lonStep]) => {
    const out = [], pieces = 48;
    const walk = (f, kind) => {
      let line = [];
      const flush = () => { if (line.length > 1) out.push({ line, kind }); line = []; };
      for (let i = 0; i <= pieces; i++) {
        const [lat, lon] = f(i / pieces), [x, y] = p.at(lat, lon);
        if (p.hidden(lat, lon) || x < -p.w || x > 2 * p.w || y < -p.h || y > 2 * p.h) { flush(); continue; }
        line.push([x, y]);
      }
      flush();
    };
    if (!p.azimuthal) b = { south: -90, north: 90, lon0: p.lon0 - 180, span: 360 };
    for (let k = Math.ceil(b.south / latStep); k * latStep <= b.north; k++) {
      const lat = k * latStep;
      if (Math.abs(lat) < 90) walk((t) => [lat, b.lon0 + t * b.span], lat === 0 ? "equator" : "");
    }
    let { south, north } = b;
    if (p.polar) { south = Math.max(south, -90 + latStep / 3); north = Math.min(north, 90 - latStep / 3); }
    for (let k = Math.ceil(b.lon0 / lonStep); k * lonStep <= b.lon0 + b.span + 1e-9; k++) walk((t) => [south + t * (north - south), k * lonStep], "");
    if (p.polar) walk((t) => [Math.sign(p.lat0) * 50, 360 * t - 180], "practice");
    return out;
  };

  const tidy = (v, d = 1e6) => Math.round(v * d) / d;
  const letters = (v, plus, minus) => tidy(Math.abs(v)) + "°" + (tidy(v) > 0 ? " " + plus : tidy(v) < 0 ? " " + minus : "");
  const latText = (v) => letters(v, "N", "S");
  const lonText = (v) => Math.abs(v) === 180 ? "180°" : letters(v, "E", "W");

  const labels = (p, b, [latStep, lonStep]) => {
    const out = [];
    const put = (x, y, text, anchor = "center") => out.push({ x, y, text, anchor });
    if (!p.azimuthal) {
      const small = p.r < 150; // every second line is lettered
      for (let lat = small ? -60 : -75; lat <= 75; lat += small ? 2 * latStep : latStep) {
        const [x, y] = p.page(equalEarth(lat, -180));
        if (y > 6 && y < p.h - 6) put(Math.max(x + 6, 4), y - 3, latText(lat), "left");
      }
      const y = clamp(p.page([0, 0])[1], 14, p.h - 8), every = small ? 2 * lonStep : lonStep;
      for (let k = Math.ceil((p.lon0 - 150) / every); k * every <= p.lon0 + 150; k++) {
        const [x] = p.page(equalEarth(0, k * every - p.lon0));
        if (x > 30 && x < p.w - 30) put(x, y + 13, lonText(wrap(k * every)));
      }
      return out;
    }
    if (p.polar) {
      const sign = Math.sign(p.lat0);
      for (let lat = Math.ceil((polarEdge + 5) / latStep) * latStep; lat < 90; lat += latStep) if (p.shows(sign * lat, 45)) { const [x, y] = p.at(sign * lat, 45); put(x, y + 4, latText(sign * lat)); }
      for (let lon = -180; lon < 180; lon += lonStep) {
        const [x, y] = p.page(p.flat(sign * (polarEdge + 3), lon, -2));
        if (x > 0 && x < p.w && y > 0 && y < p.h) put(x, y + 4, lonText(lon));
      }
      if (out.length > 2) return out;
    }
    edge(p, latStep, true, put);
    edge(p, lonStep, false, put);
    return out;
  };
  const edge = (p, step, parallels, put) => {
    let last = NaN;
    for (let i = 0; i <= 200; i++) {
      const px = parallels ? 0 : p.w * i / 200, py = parallels ? p.h * i / 200 : p.h, q = p.place(px, py);
      if (!q || p.hidden(q[0], q[1])) { last = NaN; continue; }
      const v = parallels ? q[0] : p.view.lon + difference(q[1], p.view.lon), k = Math.floor(v / step);
      if (!Number.isNaN(last) && k !== Math.floor(last / step) && Math.abs(v - last) < 90) {
        const value = tidy(Math.max(k, Math.floor(last / step)) * step);
        if (parallels && py > 14 && py < p.h - 24) put(5, py - 4, latText(value), "left");
        if (!parallels && px > 44 && px < p.w - 24 - Math.max(p.w / 5, 60)) put(px, p.h - 6, lonText(wrap(value)));
      }
      last = v;
    }
  };

  const scaleBar = (p) => {
    if (!p.azimuthal) return null;
    const perKm = p.r / 6371.0088, raw = p.w / 5 / perKm, mag = 10 ** Math.floor(Math.log10(raw));
    const km = [5, 2, 1].map((m) => m * mag).find((v) => v <= raw) || mag;
    return { length: km * perKm, text: km < 1 ? Math.round(km * 1000) + " m" : km + " km" };
  };

  // A box of meridians and parallels as runs of page positions.
  const boxRuns = (p, [west, south, east, north]) => {
    if (east < west) east += 360;
    const runs = [];
    let run = [];
    const flush = () => { if (run.length > 1) runs.push(run); run = []; };
    const side = (lat0, lon0, lat1, lon1) => {
      for (let i = 0; i <= 60; i++) {
        const lat = lat0 + (lat1 - lat0) * i / 60, lon = lon0 + (lon1 - lon0) * i / 60, [x, y] = p.at(lat, lon);
        if (p.hidden(lat, lon)) { flush(); continue; }
        if (run.length && Math.abs(x - run[run.length - 1][0]) > p.w / 2 && !p.azimuthal) flush();
        run.push([clamp(x, -9 * p.w, 10 * p.w), clamp(y, -9 * p.h, 10 * p.h)]);
      }
    };
    const round = east - west >= 360;
    side(south, west, south, east);
    if (round) flush(); else side(south, east, north, east);
    side(north, east, north, west);
    if (!round) side(north, west, south, west);
    flush();
    return runs;
  };

  return { project, wrap, difference, arc, equalEarth, ringsOf, ringsOfDifferences, landOnPage, outline, bounds, viewBox, steps, graticule, labels, scaleBar, boxRuns, latText, lonText, tidy, near, maxZoom };
})();
