/* The edges' rasteriser. It runs in a worker that map_edges.js makes from this function's text, so it must not refer to
   anything outside itself. Lines are added up as light is on a film and then developed: few edges come out clear, three
   hundred thousand come out as a soft grey that still shows where they are dense, never as a black blob. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  parts.edgeWorker = function edgeWorker() {
    let positions = new Float32Array(0);
    let edges = new Uint32Array(0);
    let removed = null;
    let film = new Float32Array(0);

    /** Adds one line that leans less than 45° away from its main axis; `along` and `across` are strides of the film. */
    function addLine(from, to, fromAcross, toAcross, length, breadth, along, across, half, weight) {
      const slope = to === from ? 0 : (toAcross - fromAcross) / (to - from);
      const reach = half * Math.sqrt(1 + slope * slope);
      let first = Math.max(0, Math.round(from));
      let last = Math.min(length - 1, Math.round(to));
      if (slope !== 0) {
        // Only the stretch that crosses the film: where the line is between its lower and upper border.
        const low = from + (-2 - reach - fromAcross) / slope;
        const high = from + (breadth + 1 + reach - fromAcross) / slope;
        first = Math.max(first, Math.ceil(Math.min(low, high)));
        last = Math.min(last, Math.floor(Math.max(low, high)));
      } else if (fromAcross < -2 || fromAcross > breadth + 1) return;
      for (let step = first; step <= last; step += 1) {
        const middle = fromAcross + slope * (step - from);
        const bottom = middle - reach;
        const top = middle + reach;
        const lowest = Math.max(0, Math.floor(bottom + 0.5));
        const highest = Math.min(breadth - 1, Math.floor(top + 0.5));
        let cell = step * along + lowest * across;
        for (let pixel = lowest; pixel <= highest; pixel += 1, cell += across) {
          const share = (top < pixel + 0.5 ? top : pixel + 0.5) - (bottom > pixel - 0.5 ? bottom : pixel - 0.5);
          film[cell] += share * weight;
        }
      }
    }

    /** Adds all edges. Long ones are fainter: those inside modules are short and so come out a little darker. */
    function expose({ width, height, scale, left, top, thickness, near }) {
      const half = thickness / 2;
      for (let edge = 0; edge < edges.length; edge += 2) {
        const one = edges[edge];
        const two = edges[edge + 1];
        if (removed && (removed[one] || removed[two])) continue;
        const x1 = positions[2 * one] * scale + left;
        const x2 = positions[2 * two] * scale + left;
        if ((x1 < -2 && x2 < -2) || (x1 > width + 2 && x2 > width + 2)) continue;
        const y1 = positions[2 * one + 1] * scale + top;
        const y2 = positions[2 * two + 1] * scale + top;
        if ((y1 < -2 && y2 < -2) || (y1 > height + 2 && y2 > height + 2)) continue;
        const long = Math.abs(x2 - x1);
        const high = Math.abs(y2 - y1);
        const weight = Math.min(1, Math.max(0.2, near / Math.hypot(long, high)));
        if (long >= high) {
          if (x1 <= x2) addLine(x1, x2, y1, y2, width, height, 1, width, half, weight);
          else addLine(x2, x1, y2, y1, width, height, 1, width, half, weight);
        } else if (y1 <= y2) addLine(y1, y2, x1, x2, height, width, width, 1, half, weight);
        else addLine(y2, y1, x2, x1, height, width, width, 1, half, weight);
      }
    }

    /** A bright but not the brightest value of the film, from a sample of its cells. */
    function brightValue() {
      const values = [];
      for (let cell = 0; cell < film.length; cell += 13) if (film[cell] > 0.05) values.push(film[cell]);
      if (values.length === 0) return 1;
      values.sort((first, second) => first - second);
      return values[Math.floor(values.length * 0.85)];
    }

    /** Turns the film into a picture of one colour whose alpha grows with exposure up to a limit. */
    function develop({ width, height, colour, single, limit }) {
      const alone = Math.min(single, (1.1 * limit) / brightValue());
      const picture = new ImageData(width, height);
      const pixels = new Uint32Array(picture.data.buffer);
      const paint = colour[0] | (colour[1] << 8) | (colour[2] << 16);
      const grain = 512;
      const brightest = 6 * limit / alone;
      const alphas = new Uint8Array(grain + 1);
      for (let step = 0; step <= grain; step += 1) {
        const exposure = (step / grain) ** 2 * brightest;
        alphas[step] = Math.round(255 * limit * (1 - Math.exp((-alone * exposure) / limit)));
      }
      for (let cell = 0; cell < film.length; cell += 1) {
        if (film[cell] === 0) continue;
        const step = Math.min(grain, Math.round(Math.sqrt(film[cell] / brightest) * grain));
        pixels[cell] = paint | (alphas[step] << 24);
      }
      return picture;
    }

    async function draw(order) {
      const start = performance.now();
      const cells = order.width * order.height;
      if (film.length === cells) film.fill(0);
      else film = new Float32Array(cells);
      expose(order);
      const bitmap = await createImageBitmap(develop(order));
      self.postMessage({ id: order.id, bitmap, ms: performance.now() - start }, [bitmap]);
    }

    self.onmessage = ({ data }) => {
      if (data.kind === "network") {
        positions = data.positions;
        edges = data.edges;
        removed = null;
      } else if (data.kind === "removed") {
        removed = data.mask;
      } else {
        draw(data);
      }
    };
  };
})();
