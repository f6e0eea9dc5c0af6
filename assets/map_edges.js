/* The layer of edges: a bitmap made in a worker for the view at rest, another of the whole network to fall back on.
   A re-clustering never draws edges again. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  /** Edges shorter than this share of the network's extent are drawn at full strength. */
  const NEAR = 0.055;
  /** A bitmap made for a closer view than twice this one would show as a dark patch. */
  const COARSEST = 0.5;

  /** @returns {Worker} made from text, which a policy of `worker-src 'self' blob:` allows */
  function makeWorker() {
    const source = new Blob([`"use strict";(${parts.edgeWorker})();`], { type: "text/javascript" });
    const address = URL.createObjectURL(source);
    const worker = new Worker(address);
    URL.revokeObjectURL(address);
    return worker;
  }

  class Edges {
    constructor() {
      /** Called when a new bitmap is there to be drawn. */
      this.arrived = () => {};
      this.worker = makeWorker();
      this.worker.onmessage = ({ data }) => this.receive(data);
      this.waiting = new Map();
      this.nextId = 1;
      this.busy = false;
      this.wanted = null;
      this.draws = 0;
      this.ms = 0;
      this.local = null;
      this.whole = null;
    }

    /** Hands a network over. The edges go to the worker for good; nobody here needs them any more. */
    setNetwork(network) {
      this.network = network;
      this.forget();
      this.worker.postMessage(
        { kind: "network", positions: network.positions, edges: network.edges }, [network.edges.buffer],
      );
      network.edges = null;
    }

    /** @param {Uint8Array|null} mask 1 for nodes that are taken out */
    setRemoved(mask) {
      this.worker.postMessage({ kind: "removed", mask });
      this.forget();
    }

    /** Drops the bitmaps: colours or edges have changed. Bitmaps still being made are ignored when they come. */
    forget() {
      this.local?.bitmap.close();
      if (this.whole !== this.local) this.whole?.bitmap.close();
      this.local = this.whole = this.wanted = null;
      this.oldest = this.nextId;
    }

    order(view, theme) {
      const { bounds } = this.network;
      return {
        kind: "draw",
        id: this.nextId++,
        width: Math.max(1, Math.round(view.width * view.ratio)),
        height: Math.max(1, Math.round(view.height * view.ratio)),
        scale: view.scale * view.ratio,
        left: view.left * view.ratio - 0.5,
        top: view.top * view.ratio - 0.5,
        thickness: view.ratio * theme.stroke * Math.min(1.5, 0.85 * Math.max(1, view.k) ** 0.2),
        near: NEAR * Math.max(bounds.width, bounds.height) * view.scale * view.ratio,
        colour: theme.edge.slice(0, 3),
        single: Math.min(0.9, 0.36 * theme.edgeStrength),
        limit: Math.min(0.9, 0.44 * theme.edgeStrength),
      };
    }

    /** Asks for a bitmap of this view; of several requests in a row only the last is served. */
    request(view, theme) {
      if (!this.network || this.network.m === 0) return;
      this.wanted = { view, theme };
      this.next();
    }

    next() {
      if (this.busy || !this.wanted) return;
      const { view, theme } = this.wanted;
      this.wanted = null;
      this.busy = true;
      this.make(view, theme).then(({ bitmap, id, ms }) => {
        this.busy = false;
        if (id >= this.oldest) this.keep(bitmap, view, ms);
        else bitmap.close();
        this.next();
      });
    }

    keep(bitmap, view, ms) {
      const picture = { bitmap, view };
      if (this.local && this.local !== this.whole) this.local.bitmap.close();
      this.local = picture;
      if (!this.whole || holdsAll(view, this.network.bounds)) {
        if (this.whole && this.whole !== picture) this.whole.bitmap.close();
        this.whole = picture;
      }
      this.draws += 1;
      this.ms = ms;
      this.arrived();
    }

    /** @returns {Promise<{bitmap: ImageBitmap, id: number, ms: number}>} */
    make(view, theme) {
      const order = this.order(view, theme);
      return new Promise((resolve) => {
        this.waiting.set(order.id, resolve);
        this.worker.postMessage(order);
      });
    }

    receive(answer) {
      this.waiting.get(answer.id)?.(answer);
      this.waiting.delete(answer.id);
    }

    get pending() {
      return this.busy || this.wanted !== null;
    }

    /** Draws the sharp bitmap where it reaches, and around it the one of the whole network. */
    draw(canvas, view) {
      const context = parts.view.prepare(canvas, view);
      const sharp = this.local && view.scale / this.local.view.scale > COARSEST ? this.local : null;
      if (this.whole && this.whole !== sharp) {
        context.save();
        if (sharp) clipAround(context, sharp, view);
        place(context, this.whole, view);
        context.restore();
      }
      if (sharp) place(context, sharp, view);
    }
  }

  /** The box of one view's picture on the screen of another. */
  function boxIn(made, now) {
    const factor = now.scale / made.scale;
    return {
      left: now.left - made.left * factor,
      top: now.top - made.top * factor,
      width: made.width * factor,
      height: made.height * factor,
    };
  }

  function holdsAll(view, bounds) {
    const left = bounds.left * view.scale + view.left;
    const top = bounds.top * view.scale + view.top;
    return left >= 0 && top >= 0
      && left + bounds.width * view.scale <= view.width && top + bounds.height * view.scale <= view.height;
  }

  /** Lets only be drawn what lies outside a picture's box. */
  function clipAround(context, picture, view) {
    const box = boxIn(picture.view, view);
    const { ratio } = view;
    context.beginPath();
    context.rect(0, 0, view.width * ratio, view.height * ratio);
    context.rect(box.left * ratio, box.top * ratio, box.width * ratio, box.height * ratio);
    context.clip("evenodd");
  }

  function place(context, picture, view) {
    const box = boxIn(picture.view, view);
    const { ratio } = view;
    context.drawImage(picture.bitmap, box.left * ratio, box.top * ratio, box.width * ratio, box.height * ratio);
  }

  parts.Edges = Edges;
})();
