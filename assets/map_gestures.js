/* Pan, zoom, click, hover and keys. During a gesture the layers are moved as they are; they are drawn anew at rest. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const CLOSEST = 48;
  const FARTHEST = 0.6;
  const REST = 80;               // ms without a movement before the layers are drawn anew
  const STEP = 70;               // CSS pixels per press of an arrow key
  const FLIGHT = 520;            // ms
  const ARROWS = { ArrowLeft: [STEP, 0], ArrowRight: [-STEP, 0], ArrowUp: [0, STEP], ArrowDown: [0, -STEP] };

  const still = () => window.matchMedia("(prefers-reduced-motion: reduce)").matches;

  class Gestures {
    /**
     * @param {HTMLElement} host
     * @param {{moved: (transform) => void, rested: () => void, at: (x, y) => object, middle: () => object,
     *          picked: (what) => void, tip: (what) => string[]|null}} answers
     */
    constructor(host, answers) {
      this.host = host;
      this.answers = answers;
      this.timer = 0;
      this.selection = window.d3.select(host);
      this.zoom = window.d3.zoom().scaleExtent([FARTHEST, CLOSEST]).clickDistance(4)
        .on("start", (event) => this.start(event))
        .on("zoom", (event) => this.move(event))
        .on("end", () => this.end());
      this.selection.call(this.zoom).on("dblclick.zoom", null);
      this.tip = document.createElement("div");
      this.tip.className = "map-tip";
      this.tip.hidden = true;
      host.append(this.tip);
      this.abort = new AbortController();
      const { signal } = this.abort;
      host.addEventListener("click", (event) => this.click(event), { signal });
      host.addEventListener("pointermove", (event) => this.hover(event), { signal });
      host.addEventListener("pointerleave", () => this.hideTip(), { signal });
      host.addEventListener("keydown", (event) => this.key(event), { signal });
    }

    resize(width, height) {
      this.width = width;
      this.height = height;
      this.zoom.extent([[0, 0], [width, height]])
        .translateExtent([[-0.5 * width, -0.5 * height], [1.5 * width, 1.5 * height]]);
    }

    start(event) {
      this.dragging = event.sourceEvent?.type === "mousedown";
      this.hideTip();
    }

    move(event) {
      if (this.dragging) this.host.classList.add("grabbed");
      this.answers.moved(event.transform);
      clearTimeout(this.timer);
      this.timer = setTimeout(() => this.answers.rested(), REST);
    }

    end() {
      this.dragging = false;
      this.host.classList.remove("grabbed");
    }

    /** Sets the transform at once; whoever calls this sees to the redraw. */
    put(transform) {
      const { zoomIdentity } = window.d3;
      this.selection.interrupt();
      this.selection.call(this.zoom.transform, zoomIdentity.translate(transform.x, transform.y).scale(transform.k));
      clearTimeout(this.timer);
    }

    /** Flies to a transform; jumps where the reader asked for no motion. */
    fly(transform) {
      if (still()) {
        this.put(transform);
        this.answers.rested();
        return;
      }
      const { zoomIdentity } = window.d3;
      this.selection.interrupt().transition().duration(FLIGHT)
        .call(this.zoom.transform, zoomIdentity.translate(transform.x, transform.y).scale(transform.k));
    }

    place(event) {
      const box = this.host.getBoundingClientRect();
      return [event.clientX - box.left, event.clientY - box.top];
    }

    click(event) {
      if (event.defaultPrevented) return;
      this.answers.picked(this.answers.at(...this.place(event)));
    }

    hover(event) {
      if (this.dragging || event.pointerType === "touch") return;
      const [x, y] = this.place(event);
      const what = this.answers.at(x, y);
      this.host.classList.toggle("over", what.kind !== "nothing");
      const lines = this.answers.tip(what);
      if (!lines) { this.hideTip(); return; }
      const [name, rest] = lines;
      const note = document.createElement("span");
      note.textContent = ` ${rest}`;
      this.tip.replaceChildren(name, note);
      this.tip.hidden = false;
      const left = Math.min(x + 12, this.width - this.tip.offsetWidth - 6);
      const top = y + 18 + this.tip.offsetHeight > this.height ? y - this.tip.offsetHeight - 8 : y + 16;
      this.tip.style.transform = `translate(${Math.max(4, left)}px, ${top}px)`;
    }

    hideTip() {
      this.tip.hidden = true;
      this.host.classList.remove("over");
    }

    key(event) {
      if (event.ctrlKey || event.metaKey || event.altKey || event.target !== this.host) return;
      if (!this.answerKey(event.key)) return;
      event.preventDefault();
      this.hideTip();
    }

    /** @returns {boolean} whether the key means something here */
    answerKey(key) {
      if (key in ARROWS) {
        const { k } = window.d3.zoomTransform(this.host);
        const [x, y] = ARROWS[key];
        this.zoom.translateBy(this.selection, x / k, y / k);
      } else if (key === "+" || key === "=") this.zoom.scaleBy(this.selection, 1.35);
      else if (key === "-" || key === "_") this.zoom.scaleBy(this.selection, 1 / 1.35);
      else if (key === "0") this.fly({ k: 1, x: 0, y: 0 });
      else if (key === "Enter") this.answers.picked(this.answers.middle());
      else return false;
      return true;
    }

    remove() {
      clearTimeout(this.timer);
      this.abort.abort();
      this.selection.interrupt().on(".zoom", null);
      this.tip.remove();
    }
  }

  parts.Gestures = Gestures;
  parts.mostZoom = CLOSEST;
})();
