/* Where the map's plane lies on the screen: fit, transform, sizes of the canvases. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const SIDE = 36;
  const SIDE_OF_FEW = 92;        // in a small network every disc has its name beside it
  const FEW = 60;
  const TOP = 30;
  const BOTTOM = 52;             // the switch and the legend lie there
  const MOST_PIXELS_PER_POINT = 2;

  /** How the whole network of n genes fits into a box of this size: screen = plane * scale + (left, top). */
  function fit(bounds, width, height, n) {
    const side = Math.min(n <= FEW ? SIDE_OF_FEW : SIDE, width / 8);
    const top = Math.min(TOP, height / 8);
    const bottom = Math.min(BOTTOM, height / 8);
    const scale = Math.min((width - 2 * side) / bounds.width, (height - top - bottom) / bounds.height);
    return {
      scale: Math.max(scale, 1e-12),
      left: width / 2 - (bounds.left + bounds.width / 2) * scale,
      top: (top + height - bottom) / 2 - (bounds.top + bounds.height / 2) * scale,
    };
  }

  /**
   * One view: what a layer needs in order to draw itself.
   * @param {{k: number, x: number, y: number}} transform d3-zoom's transform over the fitted plane
   * @returns {{width, height, ratio, scale, left, top, k}} lengths in CSS pixels
   */
  function view(base, transform, width, height, ratio) {
    return {
      width,
      height,
      ratio,
      k: transform.k,
      scale: base.scale * transform.k,
      left: transform.x + base.left * transform.k,
      top: transform.y + base.top * transform.k,
    };
  }

  function ratio() {
    return Math.min(MOST_PIXELS_PER_POINT, window.devicePixelRatio || 1);
  }

  /** Gives a canvas the size of the view, in device pixels, and empties it. */
  function prepare(canvas, now) {
    const width = Math.max(1, Math.round(now.width * now.ratio));
    const height = Math.max(1, Math.round(now.height * now.ratio));
    const context = canvas.getContext("2d");
    context.setTransform(1, 0, 0, 1, 0, 0);
    if (canvas.width !== width || canvas.height !== height) {
      canvas.width = width;
      canvas.height = height;
    } else {
      context.clearRect(0, 0, width, height);
    }
    return context;
  }

  /** The transform that brings a box of the plane into the middle of the screen. */
  function transformTo(base, box, width, height, mostZoom) {
    const room = 0.72;
    const k = Math.max(1, Math.min(
      mostZoom,
      (width * room) / Math.max(1e-9, box.width * base.scale),
      (height * room) / Math.max(1e-9, box.height * base.scale),
    ));
    const x = (box.left + box.width / 2) * base.scale + base.left;
    const y = (box.top + box.height / 2) * base.scale + base.top;
    return { k, x: width / 2 - x * k, y: height / 2 - y * k };
  }

  /**
   * Box around some nodes. Of a module the outermost twentieth on each side is left out: a gene that lies
   * far away would otherwise keep the view from coming near.
   */
  function boxAround(positions, nodes, trim) {
    const xs = Float32Array.from(nodes, (node) => positions[2 * node]).sort();
    const ys = Float32Array.from(nodes, (node) => positions[2 * node + 1]).sort();
    const low = Math.floor(trim * (xs.length - 1));
    const high = xs.length - 1 - low;
    return { left: xs[low], top: ys[low], width: xs[high] - xs[low], height: ys[high] - ys[low] };
  }

  parts.view = { fit, view, ratio, prepare, transformTo, boxAround };
})();
