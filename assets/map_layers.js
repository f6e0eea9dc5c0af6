/* The four canvases in the page, and who draws which of them when. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const NAMES = ["edges", "shading", "nodes", "labels"];
  const QUICK = 30;              // ms for all layers, up to which they are drawn in the middle of a gesture …
  const BETWEEN = 160;           // … but not more often than this

  class Layers {
    /**
     * @param {HTMLElement} host the element that the page gave us
     * @param {object} scene
     * @param {object} [edges] those of an element that the page has replaced
     */
    constructor(host, scene, edges = new parts.Edges()) {
      this.host = host;
      this.scene = scene;
      this.stale = new Set();
      this.frame = 0;
      this.lastView = 0;
      this.stats = { nodeDraws: 0, shadingDraws: 0, shadingMs: 0, nodeMs: 0, labelMs: 0, redrawMs: 0 };
      this.build();
      this.edges = edges;
      this.edges.arrived = () => this.paintEdges();
      this.theme = parts.colours.readTheme(this.probe);
      this.base = { scale: 1, left: 0, top: 0 };
      this.transform = { k: 1, x: 0, y: 0 };
      this.measure();
      this.drawn = this.viewNow();
    }

    build() {
      this.box = document.createElement("div");
      this.box.className = "map-layers";
      this.canvases = {};
      for (const name of NAMES) {
        const canvas = document.createElement("canvas");
        canvas.dataset.layer = name;
        canvas.setAttribute("aria-hidden", "true");
        this.canvases[name] = canvas;
        this.box.append(canvas);
      }
      this.probe = document.createElement("span");
      this.probe.hidden = true;
      this.message = document.createElement("div");
      this.message.className = "map-message fault";
      this.message.setAttribute("role", "alert");
      this.message.hidden = true;
      this.host.append(this.box, this.probe, this.message);
    }

    measure() {
      this.width = Math.max(1, this.host.clientWidth);
      this.height = Math.max(1, this.host.clientHeight);
      const { network } = this.scene;
      if (network) this.base = parts.view.fit(network.bounds, this.width, this.height, network.n);
    }

    viewNow(ratio = parts.view.ratio()) {
      return parts.view.view(this.base, this.transform, this.width, this.height, ratio);
    }

    /** Moves the layers as they are; draws in between only where that is quick, so that no paper shows for long. */
    move(transform) {
      this.transform = transform;
      const now = this.viewNow();
      const factor = now.scale / this.drawn.scale;
      const x = now.left - this.drawn.left * factor;
      const y = now.top - this.drawn.top * factor;
      this.box.style.transform = `translate(${x}px, ${y}px) scale(${factor})`;
      const quick = this.stats.redrawMs < QUICK && !this.edges.busy;
      if (quick && performance.now() - this.lastView > BETWEEN) this.ask("view");
    }

    /**
     * Asks for work at the next frame.
     * @param {...("view"|"field"|"paint"|"nodes"|"labels")} what field: density anew; paint: its colours
     */
    ask(...what) {
      for (const one of what) this.stale.add(one);
      if (!this.frame) this.frame = requestAnimationFrame(() => this.flush());
    }

    /** Does what was asked for, now. */
    flush() {
      cancelAnimationFrame(this.frame);
      this.frame = 0;
      const { scene, stale } = this;
      if (!scene.network || stale.size === 0) return;
      const start = performance.now();
      const view = stale.has("view");
      if (view) {
        this.drawn = this.viewNow();
        this.lastView = start;
        this.box.style.transform = "";
        this.paintEdges();
        this.edges.request(this.drawn, this.theme);
      }
      if (stale.has("field")) scene.computeField();
      if (stale.has("field") || stale.has("paint")) scene.paintField(this.theme);
      if (view || stale.has("field") || stale.has("paint")) this.paintShading();
      this.stats.shadingMs = performance.now() - start;
      if (view || stale.has("nodes")) this.paintNodes();
      if (view || stale.has("field") || stale.has("labels")) this.paintLabels();
      stale.clear();
      this.stats.redrawMs = performance.now() - start;
    }

    paintEdges() {
      this.edges.draw(this.canvases.edges, this.drawn);
    }

    paintShading() {
      const context = parts.view.prepare(this.canvases.shading, this.drawn);
      if (this.scene.field) parts.shading.draw(context, this.scene.field, this.drawn);
      this.stats.shadingDraws += 1;
    }

    paintNodes() {
      const start = performance.now();
      const context = parts.view.prepare(this.canvases.nodes, this.drawn);
      parts.nodes.draw(context, this.scene.network, this.scene.lookOf(this.theme), this.drawn, this.theme);
      this.stats.nodeDraws += 1;
      this.stats.nodeMs = performance.now() - start;
    }

    paintLabels() {
      const start = performance.now();
      const context = parts.view.prepare(this.canvases.labels, this.drawn);
      this.scene.plates = parts.labels.draw(context, this.scene, this.drawn, this.theme);
      this.stats.labelMs = performance.now() - start;
    }

    /** Reads the style sheet again: theme or projector was switched. */
    changeTheme() {
      const before = JSON.stringify(this.theme);
      this.theme = parts.colours.readTheme(this.probe);
      if (JSON.stringify(this.theme) === before) return;
      parts.labels.forgetWidths();
      this.edges.forget();
      this.ask("view", "paint");
    }

    say(text) {
      this.message.textContent = text;
      this.message.hidden = !text;
    }

    remove() {
      cancelAnimationFrame(this.frame);
      this.frame = 0;
      this.box.remove();
      this.probe.remove();
      this.message.remove();
    }
  }

  parts.Layers = Layers;
})();
