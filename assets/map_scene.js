/* What is shown, without how: network, colouring, confidence, choice. The layers ask it for their material. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const NOBODY = 0xffff;
  const NEUTRAL_SHADE = 0.34;    // of the usual shading, behind nodes coloured by confidence

  class Scene {
    constructor() {
      this.network = null;
      this.colouring = null;     // {labels, hues, numbers, grey}
      this.confidence = null;
      this.byConfidence = false;
      this.removed = null;
      this.dimmed = null;
      this.chosen = { module: null, genes: [] };
      this.chosenGenes = new Set();
      this.field = null;
      this.plates = [];
      this.look = null;
    }

    setNetwork(network) {
      const { confidence, byConfidence } = this;
      Object.assign(this, new Scene(), { network, confidence, byConfidence });
      if (confidence && confidence.length !== network.n) this.confidence = null;
      const radii = parts.nodes.radii(network);
      this.look = {
        radii,
        least: radii.reduce((least, radius) => Math.min(least, radius), Infinity),
        largest: radii.reduce((largest, radius) => Math.max(largest, radius), 0),
        colourOf: new Uint16Array(network.n),
        palette: [],
        removed: null,
        chosen: null,
      };
    }

    get numbers() { return this.colouring?.numbers || []; }

    get modules() { return this.colouring?.hues.length || 0; }

    isDrawn(module) { return !this.colouring.grey?.[module]; }

    moduleOf(node) {
      const label = this.colouring?.labels[node] ?? NOBODY;
      return label < this.modules ? label : null;
    }

    computeField() {
      this.field = this.colouring && this.modules > 0
        ? parts.shading.build(this.network, this.shadedLabels(), this.modules, (module) => this.isDrawn(module))
        : null;
    }

    /** Removed nodes cast no shading. */
    shadedLabels() {
      if (!this.removed) return this.colouring.labels;
      return this.colouring.labels.map((label, node) => (this.removed[node] ? NOBODY : label));
    }

    paintField(theme) {
      if (!this.field) return;
      const neutral = this.byConfidence && this.confidence;
      parts.shading.paint(this.field, this.modules, (module) => {
        const alpha = module === this.chosen.module ? theme.shadeChosen : theme.shade;
        return neutral
          ? { colour: theme.inkSoft, alpha: alpha * NEUTRAL_SHADE }
          : { colour: theme.hue(this.colouring.hues[module]), alpha };
      });
    }

    /** Palette and palette index of each node; radii are there already. */
    lookOf(theme) {
      const { look } = this;
      look.removed = this.removed;
      look.chosen = this.chosenMembers();
      if (this.byConfidence && this.confidence) this.colourByConfidence(theme);
      else if (this.colouring) this.colourByModule(theme);
      else {
        look.palette = [theme.node];
        look.colourOf.fill(0);
      }
      if (this.dimmed) this.addDimmed(theme);
      return look;
    }

    colourByConfidence(theme) {
      const { look, confidence } = this;
      const steps = theme.confidence.length;
      look.palette = [...theme.confidence, theme.grey];
      for (let node = 0; node < confidence.length; node += 1) {
        const value = confidence[node];
        look.colourOf[node] = value >= 0
          ? Math.min(steps - 1, Math.floor(Math.min(1, value) * steps)) : steps;
      }
    }

    colourByModule(theme) {
      const { look, colouring, modules } = this;
      look.palette = colouring.hues.map((hue, module) => (this.isDrawn(module) ? theme.hue(hue) : theme.grey));
      look.palette.push(theme.grey);
      for (let node = 0; node < colouring.labels.length; node += 1) {
        look.colourOf[node] = Math.min(colouring.labels[node], modules);
      }
    }

    /** Dimmed nodes keep their place but go back almost into the paper. */
    addDimmed(theme) {
      const { look } = this;
      const dim = look.palette.push(parts.colours.mix(theme.paper, theme.grey, 0.45)) - 1;
      for (let node = 0; node < this.dimmed.length; node += 1) if (this.dimmed[node]) look.colourOf[node] = dim;
    }

    chosenMembers() {
      const { module } = this.chosen;
      if (module === null || !this.colouring) return null;
      return Uint8Array.from(this.colouring.labels, (label) => (label === module ? 1 : 0));
    }

    membersOf(module) {
      const members = [];
      this.colouring?.labels.forEach((label, node) => { if (label === module) members.push(node); });
      return members;
    }
  }

  parts.Scene = Scene;
})();
