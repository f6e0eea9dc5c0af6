/* Draws the ruler into its SVG. Colours are classes, so a theme needs no redraw. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.rulerParts = corymb.rulerParts || {});

  const SPACE = "http://www.w3.org/2000/svg";
  const COARSER = "← coarser";
  const FINER = "finer →";

  function element(parent, name, attributes, text) {
    const made = document.createElementNS(SPACE, name);
    for (const [key, value] of Object.entries(attributes)) made.setAttribute(key, value);
    if (text !== undefined) made.textContent = text;
    parent.append(made);
    return made;
  }

  const isReady = (ruler, index) => ruler.modules[index] !== null && ruler.modules[index] !== undefined;

  /** Lengths follow the size of the tick labels, which the style sheet sets. */
  function layOut(ruler, width, height, tick) {
    const box = { left: 2.8 * tick, right: width - 14, top: 1.9 * tick + 2, bottom: height - 2.75 * tick };
    const counts = [];
    ruler.grid.forEach((_, index) => {
      if (isReady(ruler, index)) counts.push(ruler.modules[index]);
    });
    const least = Math.max(1, Math.min(...counts, Infinity));
    const most = Math.max(2, ...counts);
    const low = Number.isFinite(least) ? least * 0.6 : 1;
    const x = parts.scale.scale(ruler.grid[0], ruler.grid[ruler.grid.length - 1], box.left, box.right);
    const y = parts.scale.scale(Math.max(0.8, low), most * 1.5, box.bottom, box.top);
    return { width, height, tick, box, x, y };
  }

  /** Where a grid point's own stretch begins and ends: half-way to its neighbours. */
  function stretch(ruler, frame, index) {
    const { grid } = ruler;
    const middle = (one, two) => frame.x(Math.sqrt(grid[one] * grid[two]));
    return [
      index === 0 ? frame.x(grid[0]) : middle(index - 1, index),
      index === grid.length - 1 ? frame.x(grid[index]) : middle(index, index + 1),
    ];
  }

  /** Runs of neighbouring grid points that are ready (or not). */
  function runs(ruler, ready) {
    const found = [];
    ruler.grid.forEach((_, index) => {
      if (isReady(ruler, index) !== ready) return;
      const last = found[found.length - 1];
      if (last && last[last.length - 1] === index - 1) last.push(index);
      else found.push([index]);
    });
    return found;
  }

  function drawPlateaus(svg, ruler, { box, x }) {
    for (const { from, to, strength } of ruler.plateaus || []) {
      const left = Math.max(box.left, x(from));
      const right = Math.min(box.right, x(to));
      element(svg, "rect", {
        class: "ruler-plateau", x: left, y: box.top, width: Math.max(1, right - left), height: box.bottom - box.top,
        rx: 3, "fill-opacity": 0.07 + 0.15 * Math.min(1, Math.max(0, strength)),
      });
    }
  }

  function drawAxes(svg, ruler, frame) {
    const { box, x, y, tick } = frame;
    for (const count of parts.scale.ticks(y, tick * 1.35)) {
      element(svg, "line", { class: "ruler-grid", x1: box.left, x2: box.right, y1: y(count), y2: y(count) });
      element(svg, "text", { x: box.left - 6, y: y(count) + tick * 0.35, "text-anchor": "end" }, parts.scale.write(count));
    }
    const base = box.bottom + 2.25 * tick;
    const coarser = element(svg, "text", { x: box.left, y: base }, COARSER);
    const finer = element(svg, "text", { x: box.right, y: base, "text-anchor": "end" }, FINER);
    const free = [box.left + coarser.getComputedTextLength() + 10, box.right - finer.getComputedTextLength() - 10];
    for (const value of parts.scale.ticks(x, tick * 4)) {
      element(svg, "line", { class: "ruler-tick", x1: x(value), x2: x(value), y1: box.bottom, y2: box.bottom + 5 });
      const text = element(svg, "text", { x: x(value), y: base, "text-anchor": "middle" }, parts.scale.write(value));
      const half = text.getComputedTextLength() / 2;
      if (x(value) - half < free[0] || x(value) + half > free[1]) text.remove();
    }
    const label = element(svg, "text", { x: box.left, y: tick * 1.1 }, ruler.label || "number of modules");
    if (label.getComputedTextLength() > box.right - box.left) label.textContent = "number of modules";
  }

  function drawMissing(svg, ruler, frame) {
    const { box } = frame;
    for (const run of runs(ruler, false)) {
      const [left] = stretch(ruler, frame, run[0]);
      const [, right] = stretch(ruler, frame, run[run.length - 1]);
      element(svg, "rect", {
        class: "ruler-missing", x: left, y: box.top, width: Math.max(1, right - left), height: box.bottom - box.top,
        fill: "url(#ruler-hatch)",
      });
      const text = element(svg, "text", {
        class: "ruler-missing-text", x: (left + right) / 2, y: (box.top + box.bottom) / 2 + frame.tick * 0.35,
        "text-anchor": "middle",
      }, ruler.busy ? "being computed" : "not computed");
      if (text.getComputedTextLength() + 12 > right - left) text.remove();
    }
  }

  function drawCurve(svg, ruler, frame) {
    const { x, y, box } = frame;
    const inside = (count) => Math.min(box.bottom, Math.max(box.top, y(Math.max(0.5, count))));
    for (const run of runs(ruler, true)) {
      const bounds = (which) => run.map((index) => [x(ruler.grid[index]), inside(which?.[index] ?? ruler.modules[index])]);
      const low = widen(bounds(ruler.low), ruler, frame, run);
      const high = widen(bounds(ruler.high), ruler, frame, run).reverse();
      element(svg, "path", { class: "ruler-band", d: `M${[...low, ...high].map((point) => point.join()).join("L")}Z` });
      const steps = run.map((index) => {
        const [left, right] = stretch(ruler, frame, index);
        return `${left},${y(ruler.modules[index])}H${right}`;
      });
      element(svg, "path", { class: "ruler-curve", d: `M${steps.join("L")}` });
    }
  }

  /** The band reaches as far as the steps do. */
  function widen(points, ruler, frame, run) {
    const [left] = stretch(ruler, frame, run[0]);
    const [, right] = stretch(ruler, frame, run[run.length - 1]);
    return [[left, points[0][1]], ...points, [right, points[points.length - 1][1]]];
  }

  function drawSuggestion(svg, ruler, { box, x }) {
    if (!(ruler.suggestion > 0)) return;
    const at = Math.min(box.right, Math.max(box.left, x(ruler.suggestion)));
    const mark = element(svg, "path", { class: "ruler-suggestion", d: `M${at - 6},${box.top - 8}h12l-6,8z` });
    element(mark, "title", {}, `suggested: ${parts.scale.write(ruler.suggestion)}`);
    element(svg, "line", { class: "ruler-suggestion-line", x1: at, x2: at, y1: box.top, y2: box.bottom });
  }

  function drawMarker(svg, { box, tick }) {
    const marker = element(svg, "g", { class: "ruler-marker" });
    const half = tick * 0.75;
    element(marker, "line", { x1: 0, x2: 0, y1: box.top - 4, y2: box.bottom });
    element(marker, "path", {
      d: `M${-half},${box.bottom}h${2 * half}v${half * 0.9}l${-half},${half * 0.75}l${-half},${-half * 0.75}z`,
    });
    element(marker, "circle", { r: 5, cx: 0, cy: 0 });
    return marker;
  }

  /** Puts the marker at a value; the ring sits on the curve. */
  function placeMarker(marker, ruler, frame, index, value) {
    const at = Math.min(frame.box.right, Math.max(frame.box.left, frame.x(value)));
    marker.setAttribute("transform", `translate(${at}, 0)`);
    const ring = marker.querySelector("circle");
    const ready = index >= 0 && isReady(ruler, index);
    ring.setAttribute("visibility", ready ? "visible" : "hidden");
    if (ready) ring.setAttribute("cy", frame.y(ruler.modules[index]));
  }

  function drawHatch(svg) {
    const hatch = element(element(svg, "defs", {}), "pattern", {
      id: "ruler-hatch", width: 7, height: 7, patternUnits: "userSpaceOnUse", patternTransform: "rotate(45)",
    });
    element(hatch, "line", { class: "ruler-hatch", x1: 0, x2: 0, y1: 0, y2: 7 });
  }

  /** Draws everything; returns the frame and the marker, which is placed apart. */
  function draw(svg, ruler, width, height) {
    const tick = parseFloat(getComputedStyle(svg).getPropertyValue("--tick")) || 12;
    const frame = layOut(ruler, width, height, tick);
    svg.replaceChildren();
    svg.setAttribute("viewBox", `0 0 ${width} ${height}`);
    drawHatch(svg);
    drawPlateaus(svg, ruler, frame);
    drawAxes(svg, ruler, frame);
    drawMissing(svg, ruler, frame);
    drawCurve(svg, ruler, frame);
    drawSuggestion(svg, ruler, frame);
    return { frame, marker: drawMarker(svg, frame) };
  }

  parts.draw = { draw, placeMarker, isReady };
})();
