/* The soft area behind each module: every node spreads a little density of its module over a grid, and each cell goes
   to the strongest module, the fainter the more it is disputed. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const CELLS = 400;             // along the longer side
  const NOBODY = 0xffff;
  const REACH = 1.6;             // of a node, in typical distances between nodes
  const BLOCK = 22;              // cells; about the width of a number's plate
  const WELL_INSIDE = 150;       // strength
  const MOST_WORK = 1.7e6;        // cells touched by all nodes together: some ten milliseconds
  const FADES_FROM = 0.1;        // density, in units of one node at its own place
  const FULL_FROM = 0.5;
  const DISPUTED = 0.36;         // share of the density at which a cell is drawn as disputed …
  const UNDISPUTED = 0.64;       // … and from which it is not

  /** Lays the grid over the network; computed once per network. */
  function makeGrid({ bounds, spacing, positions }) {
    const longest = Math.max(bounds.width, bounds.height);
    const wish = (spacing * REACH * (CELLS * 0.9)) / longest;
    const reach = Math.round(Math.max(5, Math.min(30, wish, Math.sqrt(MOST_WORK / (Math.PI * positions.length / 2)))));
    const cell = longest / (CELLS - 2 * reach - 2);
    const border = (reach + 1) * cell;
    return {
      cell,
      reach,
      left: bounds.left - border,
      top: bounds.top - border,
      columns: Math.ceil((bounds.width + 2 * border) / cell) + 1,
      rows: Math.ceil((bounds.height + 2 * border) / cell) + 1,
      kernel: makeKernel(reach),
    };
  }

  /** (1 - d²/R²)² inside the radius R; row by row from `-halfWidth` to `halfWidth`. */
  function makeKernel(reach) {
    const rows = [];
    for (let y = -reach; y <= reach; y += 1) {
      const half = Math.floor(Math.sqrt(reach * reach - y * y));
      const values = new Float32Array(2 * half + 1);
      for (let x = -half; x <= half; x += 1) {
        values[x + half] = (1 - (x * x + y * y) / (reach * reach)) ** 2 + 1e-9;
      }
      rows.push({ y, half, values });
    }
    return rows;
  }

  /** Nodes grouped by module (counting sort); nodes of grey or undrawn modules are left out. */
  function groupByModule(labels, modules, isDrawn) {
    const starts = new Uint32Array(modules + 1);
    for (const label of labels) if (label < modules && isDrawn(label)) starts[label + 1] += 1;
    for (let module = 0; module < modules; module += 1) starts[module + 1] += starts[module];
    const next = starts.slice();
    const members = new Uint32Array(starts[modules]);
    for (let node = 0; node < labels.length; node += 1) {
      const label = labels[node];
      if (label < modules && isDrawn(label)) members[next[label]++] = node;
    }
    return { starts, members };
  }

  /** Spreads one module's nodes over `scratch` and lists the cells it touched; returns how many. */
  function spread(grid, positions, members, from, to, scratch, touched) {
    const { columns, cell, left, top, kernel } = grid;
    let count = 0;
    for (let index = from; index < to; index += 1) {
      const node = members[index];
      const column = Math.round((positions[2 * node] - left) / cell);
      const row = Math.round((positions[2 * node + 1] - top) / cell);
      for (const { y, half, values } of kernel) {
        let place = (row + y) * columns + column - half;
        for (let x = 0; x < values.length; x += 1, place += 1) {
          if (scratch[place] === 0) touched[count++] = place;
          scratch[place] += values[x];
        }
      }
    }
    return count;
  }

  const smooth = (value, from, to) => {
    const share = Math.min(1, Math.max(0, (value - from) / (to - from)));
    return share * share * (3 - 2 * share);
  };

  /**
   * @param {object} network positions and grid
   * @param {Uint16Array} labels module of each node
   * @param {number} modules how many there are
   * @param {(module: number) => boolean} isDrawn
   * @returns {{grid, owner: Uint16Array, strength: Uint8Array, centres: object[]}} strength 0..255
   */
  function build(network, labels, modules, isDrawn) {
    const grid = network.grid || (network.grid = makeGrid(network));
    const cells = grid.columns * grid.rows;
    const { starts, members } = groupByModule(labels, modules, isDrawn);
    const room = network.room || (network.room = {
      scratch: new Float32Array(cells), touched: new Uint32Array(cells),
      best: new Float32Array(cells), total: new Float32Array(cells),
    });
    const { scratch, touched, best, total } = room;
    best.fill(0);
    total.fill(0);
    const owner = new Uint16Array(cells).fill(NOBODY);
    for (let module = 0; module < modules; module += 1) {
      if (starts[module] === starts[module + 1]) continue;
      const count = spread(grid, network.positions, members, starts[module], starts[module + 1], scratch, touched);
      for (let index = 0; index < count; index += 1) {
        const place = touched[index];
        const value = scratch[place];
        scratch[place] = 0;
        total[place] += value;
        if (value > best[place]) { best[place] = value; owner[place] = module; }
      }
    }
    const strength = new Uint8Array(cells);
    for (let place = 0; place < cells; place += 1) {
      const value = best[place];
      if (value <= FADES_FROM) continue;
      strength[place] = 255 * smooth(value, FADES_FROM, FULL_FROM) * smooth(value / total[place], DISPUTED, UNDISPUTED);
    }
    return { grid, owner, strength, centres: findCentres(grid, owner, strength, modules) };
  }

  /** Per module: sums of weight times column, weight times row, weight, over the cells that it owns. */
  function sumUp(grid, owner, strength, modules) {
    const sums = new Float64Array(3 * modules);
    for (let row = 0, place = 0; row < grid.rows; row += 1) {
      for (let column = 0; column < grid.columns; column += 1, place += 1) {
        const weight = strength[place];
        if (weight === 0) continue;
        const at = 3 * owner[place];
        sums[at] += weight * column;
        sums[at + 1] += weight * row;
        sums[at + 2] += weight;
      }
    }
    return sums;
  }

  /** The block of cells in which a module owns most; one pass for all modules that ask. */
  function heaviestBlocks(grid, owner, strength, wanted) {
    const across = Math.ceil(grid.columns / BLOCK);
    const sums = new Map([...wanted].map((module) => [module, new Uint32Array(across * Math.ceil(grid.rows / BLOCK))]));
    for (let place = 0; place < owner.length; place += 1) {
      const blocks = strength[place] > 0 ? sums.get(owner[place]) : undefined;
      if (!blocks) continue;
      const row = Math.floor(place / grid.columns);
      blocks[Math.floor(row / BLOCK) * across + Math.floor((place - row * grid.columns) / BLOCK)] += strength[place];
    }
    const middles = new Map();
    sums.forEach((blocks, module) => {
      const heaviest = blocks.reduce((best, sum, block) => (sum > blocks[best] ? block : best), 0);
      middles.set(module, [(heaviest % across + 0.5) * BLOCK, (Math.floor(heaviest / across) + 0.5) * BLOCK]);
    });
    return middles;
  }

  /** Moves a few times to the middle of what the module owns nearby. */
  function settle(grid, owner, strength, module, [startColumn, startRow]) {
    let column = startColumn;
    let row = startRow;
    for (let turn = 0; turn < 4; turn += 1) {
      let weights = 0, columns = 0, rows = 0;
      const left = Math.max(0, Math.round(column) - BLOCK), right = Math.min(grid.columns - 1, left + 2 * BLOCK);
      const top = Math.max(0, Math.round(row) - BLOCK), bottom = Math.min(grid.rows - 1, top + 2 * BLOCK);
      for (let y = top; y <= bottom; y += 1) {
        for (let x = left; x <= right; x += 1) {
          const place = y * grid.columns + x;
          if (owner[place] !== module || strength[place] === 0) continue;
          weights += strength[place];
          columns += strength[place] * x;
          rows += strength[place] * y;
        }
      }
      if (weights === 0) break;
      column = columns / weights;
      row = rows / weights;
    }
    return [column, row];
  }

  /**
   * Per module: where its number is written and the size of its area, in units of the plane. The number stands in the
   * middle of the area or, where that middle belongs to another or to nobody, on the module's largest island.
   */
  function findCentres(grid, owner, strength, modules) {
    const sums = sumUp(grid, owner, strength, modules);
    const middles = new Map();
    const astray = new Set();
    for (let module = 0; module < modules; module += 1) {
      const weight = sums[3 * module + 2];
      if (weight === 0) continue;
      const column = sums[3 * module] / weight;
      const row = sums[3 * module + 1] / weight;
      const place = Math.round(row) * grid.columns + Math.round(column);
      middles.set(module, [column, row]);
      if (owner[place] !== module || strength[place] < WELL_INSIDE) astray.add(module);
    }
    if (astray.size > 0) {
      heaviestBlocks(grid, owner, strength, astray).forEach((block, module) => {
        middles.set(module, settle(grid, owner, strength, module, block));
      });
    }
    return Array.from({ length: modules }, (_, module) => middles.has(module) ? {
      module,
      x: grid.left + middles.get(module)[0] * grid.cell,
      y: grid.top + middles.get(module)[1] * grid.cell,
      area: (sums[3 * module + 2] / 255) * grid.cell * grid.cell,
    } : null);
  }

  /**
   * Colours the field: one small picture, stretched over the plane when drawn.
   * @param {object} field what `build` returned
   * @param {(module: number) => {colour: number[], alpha: number}} paintOf
   */
  function paint(field, modules, paintOf) {
    const { grid, owner, strength } = field;
    const image = new ImageData(grid.columns, grid.rows);
    const pixels = new Uint32Array(image.data.buffer);
    const hues = new Uint32Array(modules);
    const alphas = new Float32Array(modules);
    for (let module = 0; module < modules; module += 1) {
      const { colour, alpha } = paintOf(module);
      hues[module] = Math.round(colour[0]) | (Math.round(colour[1]) << 8) | (Math.round(colour[2]) << 16);
      alphas[module] = alpha;
    }
    for (let place = 0; place < pixels.length; place += 1) {
      const weight = strength[place];
      if (weight === 0) continue;
      const module = owner[place];
      pixels[place] = hues[module] | (Math.round(weight * alphas[module]) << 24);
    }
    if (!field.canvas) {
      field.canvas = document.createElement("canvas");
      field.canvas.width = grid.columns;
      field.canvas.height = grid.rows;
    }
    field.canvas.getContext("2d").putImageData(image, 0, 0);
  }

  /** Draws the coloured field; cell centres lie on whole grid coordinates. */
  function draw(context, field, view) {
    const { grid } = field;
    const scale = view.scale * view.ratio;
    context.imageSmoothingEnabled = true;
    context.imageSmoothingQuality = "high";
    context.drawImage(
      field.canvas,
      (grid.left - grid.cell / 2) * scale + view.left * view.ratio,
      (grid.top - grid.cell / 2) * scale + view.top * view.ratio,
      grid.columns * grid.cell * scale,
      grid.rows * grid.cell * scale,
    );
  }

  /** The module whose shading lies at a place of the plane, or null. */
  function moduleAt(field, x, y) {
    const { grid, owner, strength } = field;
    const column = Math.round((x - grid.left) / grid.cell);
    const row = Math.round((y - grid.top) / grid.cell);
    if (column < 0 || row < 0 || column >= grid.columns || row >= grid.rows) return null;
    const place = row * grid.columns + column;
    return strength[place] > 50 ? owner[place] : null;
  }

  parts.shading = { build, paint, draw, moduleAt };
})();
