/* The top layer: module numbers on small plates, rings and names of chosen genes, names of hubs once there is room. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const MOST_NAMES = 48;
  const NAMES_FROM_ZOOM = 1.9;
  const FEW = 2500;              // up to so many nodes, plates make way for discs
  const PLACES = [[0, 0], [0, -0.8], [0, 0.8], [-0.9, 0], [0.9, 0], [0, -1.6], [0, 1.6]];   // in heights of a plate
  const widths = new Map();

  /** Boxes already taken, and the question whether another still fits. */
  class Taken {
    constructor() { this.boxes = []; }

    free(box, gap = 2) {
      return this.boxes.every((other) => (
        box.left > other.left + other.width + gap || box.left + box.width + gap < other.left
        || box.top > other.top + other.height + gap || box.top + box.height + gap < other.top
      ));
    }

    /** @returns {boolean} true if the box was free; it is taken then */
    take(box, gap = 2) {
      const free = this.free(box, gap);
      if (free) this.boxes.push(box);
      return free;
    }
  }

  function widthOf(context, text) {
    const key = `${context.font}|${text}`;
    if (!widths.has(key)) {
      if (widths.size > 5000) widths.clear();
      widths.set(key, context.measureText(text).width);
    }
    return widths.get(key);
  }

  const fontOf = (theme, size, weight) => `${weight} ${size}px ${theme.type}`;

  function toScreen(view, x, y) {
    return [x * view.scale + view.left, y * view.scale + view.top];
  }

  function rounded(context, box, radius) {
    context.beginPath();
    context.roundRect(box.left, box.top, box.width, box.height, radius);
  }

  function onScreen(view, x, y, margin) {
    return x > -margin && y > -margin && x < view.width + margin && y < view.height + margin;
  }

  /** Modules in the order in which they claim room: the chosen one, then by the size of their area. */
  function claimants(scene) {
    const { field, chosen } = scene;
    return field.centres.filter(Boolean).sort((one, two) => (
      (two.module === chosen.module) - (one.module === chosen.module) || two.area - one.area || one.module - two.module
    ));
  }

  /** A plate needs an area of its own about twice its size; the chosen module always gets one. */
  function fits(centre, view, box, isChosen) {
    return isChosen || centre.area * view.scale * view.scale > 2.3 * box.width * box.height;
  }

  /**
   * Draws the module numbers.
   * @returns {object[]} boxes in CSS pixels with their module, for picking
   */
  function drawPlates(context, scene, view, theme, taken) {
    const size = theme.noteSize + 1;
    context.font = fontOf(theme, size, 700);
    context.textAlign = "center";
    context.textBaseline = "alphabetic";
    const plates = [];
    const discs = scene.network.n <= FEW ? discsOnScreen(scene, view) : [];
    for (const centre of claimants(scene)) {
      const [x, y] = toScreen(view, centre.x, centre.y);
      if (!onScreen(view, x, y, 80)) continue;
      const isChosen = centre.module === scene.chosen.module;
      const text = scene.numbers[centre.module] ?? `M${centre.module + 1}`;
      const width = widthOf(context, text) + 11;
      const height = size * 1.45;
      const box = { left: x - width / 2, top: y - height / 2, width, height, module: centre.module, text };
      if (!fits(centre, view, box, isChosen) || !settle(taken, box, discs, scene.field, view)) continue;
      plates.push(box);
    }
    for (const box of plates) {
      rounded(context, box, 5);
      context.fillStyle = parts.colours.text(theme.plate);
      context.fill();
      if (box.module === scene.chosen.module) {
        context.lineWidth = theme.stroke;
        context.strokeStyle = parts.colours.text(theme.ink);
        context.stroke();
      }
      context.fillStyle = parts.colours.text(theme.ink);
      context.fillText(box.text, box.left + box.width / 2, box.top + box.height / 2 + size * 0.35);
    }
    return plates;
  }

  /** Centres of the discs on the screen, as pairs in one flat list. */
  function discsOnScreen(scene, view) {
    const { positions } = scene.network;
    const found = [];
    for (let at = 0; at < positions.length; at += 2) {
      const [x, y] = toScreen(view, positions[at], positions[at + 1]);
      if (onScreen(view, x, y, 0)) found.push(x, y);
    }
    return found;
  }

  function covered(discs, box) {
    let count = 0;
    for (let at = 0; at < discs.length; at += 2) {
      if (discs[at] > box.left - 2 && discs[at] < box.left + box.width + 2
        && discs[at + 1] > box.top - 2 && discs[at + 1] < box.top + box.height + 2) count += 1;
    }
    return count;
  }

  /** Outside its own shading a plate is harder to read rightly; inside another's it misleads. */
  function strangeness(field, view, box) {
    const y = (box.top + box.height / 2 - view.top) / view.scale;
    return [0.15, 0.5, 0.85].reduce((sum, share) => {
      const x = (box.left + share * box.width - view.left) / view.scale;
      const module = parts.shading.moduleAt(field, x, y);
      if (module === box.module) return sum;
      return sum + (module === null ? 1 : 3);
    }, 0);
  }

  /** Of the free places at and around the middle takes the one that hides fewest discs; false if none is free. */
  function settle(taken, box, discs, field, view) {
    const { left, top } = box;
    const places = PLACES
      .map(([across, down]) => ({ ...box, left: left + across * box.height, top: top + down * box.height }))
      .filter((place) => taken.free(place));
    if (places.length === 0) return false;
    const cost = (place) => covered(discs, place) + strangeness(field, view, place)
      + (Math.abs(place.left - left) + Math.abs(place.top - top)) / (1.5 * box.height);
    const best = discs.length === 0 ? places[0] : places.reduce((one, two) => (cost(two) < cost(one) ? two : one));
    Object.assign(box, { left: best.left, top: best.top });
    return taken.take(box);
  }

  /** Ring around a chosen gene: ink inside paper, so that it shows on any ground. */
  function drawRing(context, x, y, radius, theme) {
    context.beginPath();
    context.arc(x, y, radius + 4, 0, 2 * Math.PI);
    context.lineWidth = 5 * theme.stroke;
    context.strokeStyle = parts.colours.text(theme.paper, 0.95);
    context.stroke();
    context.lineWidth = 2.2 * theme.stroke;
    context.strokeStyle = parts.colours.text(theme.ink);
    context.stroke();
  }

  function drawName(context, text, left, middle, size, theme) {
    context.lineWidth = 3.5;
    context.lineJoin = "round";
    context.strokeStyle = parts.colours.text(theme.paper, 0.92);
    context.strokeText(text, left, middle + size * 0.34);
    context.fillStyle = parts.colours.text(theme.ink);
    context.fillText(text, left, middle + size * 0.34);
  }

  /** A name to the right of its disc, or to the left where that is taken. */
  function placeName(context, text, x, y, away, size, taken, must) {
    const width = widthOf(context, text);
    const height = size * 1.2;
    for (const left of [x + away, x - away - width]) {
      const box = { left, top: y - height / 2, width, height };
      if (taken.take(box, 1)) return left;
    }
    return must ? x + away : null;
  }

  function radiusOf(scene, node, view, theme) {
    return scene.look.radii[node] * parts.nodes.growth(view, theme);
  }

  function drawChosenGenes(context, scene, view, theme, taken) {
    const { network, chosen } = scene;
    const size = theme.noteSize;
    context.font = fontOf(theme, size, 700);
    context.textAlign = "left";
    const shown = chosen.genes
      .map((gene) => [gene, ...toScreen(view, network.positions[2 * gene], network.positions[2 * gene + 1])])
      .filter(([, x, y]) => onScreen(view, x, y, 40));
    for (const [gene, x, y] of shown) drawRing(context, x, y, radiusOf(scene, gene, view, theme), theme);
    const few = shown.length <= 12;
    for (const [gene, x, y] of shown) {
      const away = radiusOf(scene, gene, view, theme) + 9;
      const left = placeName(context, network.names[gene], x, y, away, size, taken, few);
      if (left !== null) drawName(context, network.names[gene], left, y, size, theme);
    }
  }

  /** Names of the visible nodes with most edges, as many as fit. */
  function drawHubNames(context, scene, view, theme, taken) {
    const { network, look } = scene;
    if (view.k < NAMES_FROM_ZOOM && network.n > 60) return;
    const size = theme.noteSize - 1;
    context.font = fontOf(theme, size, 400);
    context.textAlign = "left";
    let left = Math.min(MOST_NAMES, Math.round(6 * view.k ** 1.3) + (network.n <= 60 ? 60 : 0));
    for (let index = network.n - 1; index >= 0 && left > 0; index -= 1) {
      const node = network.order[index];
      if (look.removed?.[node] || scene.chosenGenes.has(node)) continue;
      const [x, y] = toScreen(view, network.positions[2 * node], network.positions[2 * node + 1]);
      if (!onScreen(view, x, y, 0)) continue;
      left -= 1;
      const away = radiusOf(scene, node, view, theme) + 4;
      const at = placeName(context, network.names[node], x, y, away, size, taken, false);
      if (at !== null) drawName(context, network.names[node], at, y, size, theme);
    }
  }

  /** @returns {object[]} the plates drawn, see drawPlates */
  function draw(context, scene, view, theme) {
    context.setTransform(view.ratio, 0, 0, view.ratio, 0, 0);
    const taken = new Taken();
    const plates = scene.field ? drawPlates(context, scene, view, theme, taken) : [];
    drawChosenGenes(context, scene, view, theme, taken);
    drawHubNames(context, scene, view, theme, taken);
    return plates;
  }

  /** Widths measured before the type was there are wrong afterwards. */
  function forgetWidths() {
    widths.clear();
  }

  parts.labels = { draw, forgetWidths };
})();
