/* The layer of nodes: small discs with a rim. They are written straight into the pixels from ready-made stamps (one per
   radius and quarter of a pixel), which without a graphics card is many times quicker than twenty thousand arcs. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const QUARTERS = 4;
  const HUB_SHARE = 0.995;       // degrees above this quantile are drawn no larger
  const stamps = new Map();

  /**
   * Radius of each node at the fitted view, in CSS pixels: square root of the degree between a least and a largest
   * that shrink as networks grow.
   */
  function radii(network) {
    const least = Math.min(3.8, Math.max(0.9, 15 / network.n ** 0.32));
    const largest = least * 2.8;
    const top = Math.max(1, network.degrees[network.order[Math.floor(HUB_SHARE * (network.n - 1))]] || 1);
    return Float32Array.from(network.degrees, (degree) => (
      least + (largest - least) * Math.sqrt(Math.min(1, degree / top))
    ));
  }

  /** Discs grow moderately with the zoom and a little with the window. */
  function growth(view, theme) {
    const window = Math.sqrt(Math.min(view.width, view.height) / 560);
    return theme.disc * Math.min(1.35, Math.max(0.75, window)) * Math.min(6, Math.max(0.8, view.k ** 0.5));
  }

  /**
   * Coverage of a disc and its rim on pixels: `cover` 0..255 for both together, `fill` 0..255 for the share of the disc
   * itself. All lengths in quarters of a device pixel.
   */
  function stamp(radius, rim, phaseX, phaseY) {
    const key = ((radius * 64 + rim) * QUARTERS + phaseX) * QUARTERS + phaseY;
    const known = stamps.get(key);
    if (known) return known;
    const outer = (radius + rim) / QUARTERS;
    const inner = radius / QUARTERS;
    const half = Math.ceil(outer + 1);
    const side = 2 * half + 1;
    const cover = new Uint8Array(side * side);
    const fill = new Uint8Array(side * side);
    for (let y = 0; y < side; y += 1) {
      for (let x = 0; x < side; x += 1) {
        const away = Math.hypot(x - half - phaseX / QUARTERS, y - half - phaseY / QUARTERS);
        const whole = Math.min(1, Math.max(0, outer + 0.5 - away));
        const disc = Math.min(1, Math.max(0, inner + 0.5 - away));
        cover[y * side + x] = Math.round(255 * whole);
        fill[y * side + x] = whole > 0 ? Math.round((255 * disc) / whole) : 0;
      }
    }
    const made = { half, side, cover, fill };
    if (stamps.size > 4000) stamps.clear();
    stamps.set(key, made);
    return made;
  }

  /** Writes one disc into the pixels: rim and fill are [red, green, blue]. */
  function press(data, words, width, height, x, y, radius, rim, fillColour, rimColour) {
    const quarterX = Math.round(x * QUARTERS);
    const quarterY = Math.round(y * QUARTERS);
    const column = quarterX >> 2;
    const row = quarterY >> 2;
    const { half, side, cover, fill } = stamp(radius, rim, quarterX & 3, quarterY & 3);
    const firstX = Math.max(0, half - column);
    const lastX = Math.min(side, width - column + half);
    const firstY = Math.max(0, half - row);
    const lastY = Math.min(side, height - row + half);
    const [fillRed, fillGreen, fillBlue] = fillColour;
    const [rimRed, rimGreen, rimBlue] = rimColour;
    const solid = (fillRed | (fillGreen << 8) | (fillBlue << 16) | 0xff000000) >>> 0;
    for (let stampY = firstY; stampY < lastY; stampY += 1) {
      let from = stampY * side + firstX;
      let place = (row + stampY - half) * width + column - half + firstX;
      for (let stampX = firstX; stampX < lastX; stampX += 1, from += 1, place += 1) {
        const covered = cover[from];
        if (covered === 0) continue;
        const share = fill[from];
        if (covered === 255 && share === 255) { words[place] = solid; continue; }
        const red = rimRed + ((fillRed - rimRed) * share) / 255;
        const green = rimGreen + ((fillGreen - rimGreen) * share) / 255;
        const blue = rimBlue + ((fillBlue - rimBlue) * share) / 255;
        const at = place * 4;
        const below = (data[at + 3] * (255 - covered)) / 255;
        const alpha = covered + below;
        data[at] = (red * covered + data[at] * below) / alpha;
        data[at + 1] = (green * covered + data[at + 1] * below) / alpha;
        data[at + 2] = (blue * covered + data[at + 2] * below) / alpha;
        data[at + 3] = alpha;
      }
    }
  }

  /**
   * @param {object} network positions, order
   * @param {object} look radii, colourOf (palette index per node), palette (rgb), removed, chosen (0/1 per node or null)
   */
  function pixelsOf(network, look, view, theme) {
    const width = Math.max(1, Math.round(view.width * view.ratio));
    const height = Math.max(1, Math.round(view.height * view.ratio));
    const image = new ImageData(width, height);
    const data = image.data;
    const words = new Uint32Array(data.buffer);
    const whole = (colour) => colour.slice(0, 3).map(Math.round);
    const palette = look.palette.map(whole);
    const dark = look.chosen ? look.palette.map((colour) => whole(parts.colours.mix(colour, theme.ink, 0.7))) : [];
    const paper = whole(theme.paper);
    const ink = whole(theme.ink);
    const grow = growth(view, theme) * view.ratio;
    const quarter = (length) => Math.max(1, Math.round(length * QUARTERS));
    const rims = rimWidths(look, grow, view, theme);
    const pass = (chosenOnly) => {
      for (const node of network.order) {
        if (look.removed && look.removed[node]) continue;
        if (look.chosen ? Boolean(look.chosen[node]) !== chosenOnly : chosenOnly) continue;
        const x = (network.positions[2 * node] * view.scale + view.left) * view.ratio - 0.5;
        const y = (network.positions[2 * node + 1] * view.scale + view.top) * view.ratio - 0.5;
        const radius = look.radii[node] * grow;
        if (x < -radius - 4 || y < -radius - 4 || x > width + radius + 4 || y > height + radius + 4) continue;
        const colour = palette[look.colourOf[node]];
        const size = quarter(radius);
        if (chosenOnly && radius > 1.9 * view.ratio) {
          press(data, words, width, height, x, y, size + quarter(rims.gap), quarter(rims.dark), paper, ink);
        }
        const rim = chosenOnly && radius <= 1.9 * view.ratio ? dark[look.colourOf[node]] : paper;
        press(data, words, width, height, x, y, size, quarter(rims.paper), colour, rim);
      }
    };
    pass(false);
    if (look.chosen) pass(true);
    return image;
  }

  /** Rims in device pixels; thinner where discs are tiny, so that they never eat the discs. */
  function rimWidths(look, grow, view, theme) {
    const fine = Math.min(1, (look.least * grow) / (2.2 * view.ratio));
    return {
      paper: 0.9 * view.ratio * fine * Math.min(1.5, theme.stroke),
      gap: 0.9 * view.ratio * fine,
      dark: 1.25 * view.ratio * Math.max(0.75, fine) * Math.min(1.5, theme.stroke),
    };
  }

  function draw(context, network, look, view, theme) {
    context.putImageData(pixelsOf(network, look, view, theme), 0, 0);
  }

  parts.nodes = { radii, growth, draw, pixelsOf };
})();
