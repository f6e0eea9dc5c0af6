/* The map's protocol: what the rest of the page may ask of it. Every call may come before the network has arrived; it is
   then kept and answered when it has. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  let scene = null;
  let layers = null;
  let gestures = null;
  let watchers = [];
  let loading = 0;               // number of the load that counts
  let waiting = null;            // calls made while a network is on its way

  /** Builds the canvases in the map's element; anew when the page has replaced it, with all that was shown. */
  function mount() {
    const host = document.getElementById("map");
    if (!host) throw new Error("the page has no element #map");
    if (layers && layers.host === host) return;
    unmount();
    scene = scene || new parts.Scene();
    layers = new parts.Layers(host, scene, layers?.edges);
    gestures = new parts.Gestures(host, {
      moved: (transform) => layers.move(transform),
      rested: () => layers.ask("view"),
      at: (x, y) => (scene.network ? parts.picking.at(scene, layers.viewNow(), layers.theme, x, y) : nothing()),
      middle: () => (scene.network
        ? parts.picking.moduleAt(scene, layers.viewNow(), layers.width / 2, layers.height / 2) : nothing()),
      picked: (what) => { if (scene.network) corymb.map.onPick?.(what); },
      tip: tipOf,
    });
    gestures.resize(layers.width, layers.height);
    host.tabIndex = 0;
    host.setAttribute("role", "application");
    host.setAttribute("aria-roledescription", "map");
    describe();
    watch(host);
    if (scene.network) layers.ask("view", "field");
  }

  const nothing = () => ({ kind: "nothing", index: -1 });

  function unmount() {
    watchers.forEach((watcher) => watcher.disconnect());
    watchers = [];
    gestures?.remove();
    layers?.remove();
  }

  function watch(host) {
    const size = new ResizeObserver(() => resize());
    size.observe(host);
    const theme = new MutationObserver(() => layers.changeTheme());
    theme.observe(document.documentElement, {
      attributes: true, attributeFilter: ["data-theme", "data-projector", "class", "style"],
    });
    watchers = [size, theme];
    document.fonts?.load(`700 14px ${layers.theme.type}`).then(() => {
      parts.labels.forgetWidths();
      layers?.ask("labels");
    });
  }

  /** Keeps the middle of the screen where it is. */
  function resize() {
    const before = layers.viewNow();
    if (layers.host.clientWidth === 0) return;
    if (layers.width === layers.host.clientWidth && layers.height === layers.host.clientHeight) return;
    const x = (before.width / 2 - before.left) / before.scale;
    const y = (before.height / 2 - before.top) / before.scale;
    layers.measure();
    gestures.resize(layers.width, layers.height);
    const { k } = before;
    const { base } = layers;
    gestures.put(k === 1 ? { k: 1, x: 0, y: 0 } : {
      k,
      x: layers.width / 2 - (x * base.scale + base.left) * k,
      y: layers.height / 2 - (y * base.scale + base.top) * k,
    });
    layers.ask("view");
  }

  function describe() {
    const { network } = scene;
    layers.host.setAttribute("aria-label", network
      ? `Map of ${network.label || "the network"}: ${network.n} genes, ${network.m} interactions. `
        + "Arrow keys move it, plus and minus zoom, 0 shows all, Enter opens the module in the middle."
      : "Map of the network");
  }

  function tipOf(what) {
    if (what.kind !== "gene") return null;
    const module = scene.moduleOf(what.index);
    const home = module === null ? "in no module drawn" : scene.numbers[module] ?? `M${module + 1}`;
    return [scene.network.names[what.index], `degree ${scene.network.degrees[what.index]} · ${home}`];
  }

  /** Runs now, or once the network that is on its way has come. */
  function whenReady(name, action) {
    mount();
    if (waiting) waiting.set(name, action);
    else if (scene.network) action();
  }

  function checkLength(array, what) {
    if (array && array.length !== scene.network.n) {
      throw new RangeError(`${what} for ${array.length} genes, but the map shows ${scene.network.n}`);
    }
  }

  /**
   * Fetches a network and draws it: grey nodes at once, edges as soon as the worker has them.
   * @param {{url: string, names?: string[]|null, label?: string}} source
   * @returns {Promise<{nodes: number, edges: number}>} settles when the nodes are drawn
   */
  async function load(source) {
    mount();
    loading += 1;
    const mine = loading;
    waiting = new Map();
    layers.say("");
    try {
      const network = await parts.data.fetchNetwork(source);
      if (mine !== loading) return stats();
      mount();
      scene.setNetwork(network);
      layers.edges.setNetwork(network);
      layers.measure();
      gestures.put({ k: 1, x: 0, y: 0 });
      describe();
    } catch (fault) {
      if (mine === loading) {
        waiting = null;
        layers?.say(`The network could not be drawn: ${fault.message}.`);
      }
      throw fault;
    }
    const calls = waiting;
    waiting = null;
    layers.ask("view", "nodes");
    layers.flush();
    calls.forEach((action) => action());
    return stats();
  }

  /**
   * Colours nodes and shading by module; edges stay as they are.
   * @param {{labels: ArrayLike<number>, hues: string[], numbers: string[], grey: ArrayLike<number>|null}} colouring
   *   labels: module per gene, 0xFFFF for none; hues: a CSS colour per module; grey: 1 for modules under the size cut
   */
  function colour(colouring) {
    whenReady("colour", () => {
      checkLength(colouring.labels, "labels");
      scene.colouring = {
        labels: colouring.labels instanceof Uint16Array ? colouring.labels : Uint16Array.from(colouring.labels),
        hues: colouring.hues,
        numbers: colouring.numbers || [],
        grey: colouring.grey || null,
      };
      layers.ask("field", "nodes", "labels");
    });
  }

  /**
   * Colours nodes by confidence instead of by module.
   * @param {ArrayLike<number>|null} values 0..1 per gene, NaN where unknown; null keeps those given before
   * @param {boolean} on
   */
  function confidence(values, on) {
    whenReady("confidence", () => {
      checkLength(values, "confidence");
      if (values) scene.confidence = Float32Array.from(values);
      scene.byConfidence = Boolean(on);
      layers.ask("paint", "nodes");
    });
  }

  /** @param {{module?: number|null, genes?: number[]}|null} choice stronger shading and dark rims; rings and names */
  function select(choice) {
    whenReady("select", () => {
      const genes = Array.from(choice?.genes || []).filter((gene) => gene >= 0 && gene < scene.network.n);
      scene.chosen = { module: choice?.module ?? null, genes };
      scene.chosenGenes = new Set(genes);
      layers.ask("paint", "nodes", "labels");
    });
  }

  /** @param {{genes: number[]}|{module: number}|null} what flies there; null flies back to the whole */
  function focus(what) {
    whenReady("focus", () => {
      const isModule = what && Number.isInteger(what.module);
      const nodes = isModule ? scene.membersOf(what.module) : Array.from(what?.genes || []);
      if (nodes.length === 0) { gestures.fly({ k: 1, x: 0, y: 0 }); return; }
      const box = parts.view.boxAround(scene.network.positions, nodes, isModule && nodes.length > 20 ? 0.05 : 0);
      const closest = Math.min(parts.mostZoom, nodes.length === 1 ? 5 : 12);
      gestures.fly(parts.view.transformTo(layers.base, box, layers.width, layers.height, closest));
    });
  }

  /** @param {ArrayLike<number>|null} mask 1 for genes that are taken out, with their edges; null puts all back */
  function remove(mask) {
    whenReady("remove", () => {
      checkLength(mask, "a mask");
      scene.removed = mask ? Uint8Array.from(mask) : null;
      layers.edges.setRemoved(scene.removed);
      layers.ask("view", "field");
    });
  }

  /** @param {ArrayLike<number>|null} mask 1 for genes that step back; null brings all forward */
  function dim(mask) {
    whenReady("dim", () => {
      checkLength(mask, "a mask");
      scene.dimmed = mask ? Uint8Array.from(mask) : null;
      layers.ask("nodes");
    });
  }

  /** @returns {Promise<Blob>} the map as seen, at twice its size unless another is asked for */
  async function png(size) {
    mount();
    return parts.picture.png(layers, scene, size);
  }

  /** What the modules on the map are called and how they are coloured; null before there are any. */
  function colouring() {
    return scene?.colouring ?? null;
  }

  /** Where a gene is on the screen now, in CSS pixels of the map's element. */
  function where(gene) {
    const view = layers.viewNow();
    const { positions } = scene.network;
    return { x: positions[2 * gene] * view.scale + view.left, y: positions[2 * gene + 1] * view.scale + view.top };
  }

  /** Counts and times of the last drawing, for tests and for the curious. */
  function stats() {
    return {
      nodes: scene?.network?.n ?? 0,
      edges: scene?.network?.m ?? 0,
      edgeDraws: layers?.edges.draws ?? 0,
      edgeMs: layers?.edges.ms ?? 0,
      ...layers?.stats,
      zoom: layers?.transform.k ?? 1,
      plates: scene?.plates.map(({ module, left, top, width, height }) => ({ module, left, top, width, height })) ?? [],
      waiting: Boolean(waiting || (layers && (layers.frame || layers.edges.pending))),
    };
  }

  corymb.map = { load, colour, confidence, select, focus, remove, dim, png, colouring, where, stats, onPick: null };
})();
