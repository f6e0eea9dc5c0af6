/* The resolution ruler: the number of modules against resolution, and one marker to drag. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.rulerParts = corymb.rulerParts || {});

  const KEY_REST = 250;          // ms after the last key before the marker counts as at rest
  const PAGE = 5;                // grid points per PageUp or PageDown
  const KEYS = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1, PageUp: PAGE, PageDown: -PAGE };

  let ruler = null;              // what draw() was given
  let host = null;
  let svg = null;
  let drawn = null;              // {frame, marker}
  let value = 1;
  let index = -1;
  let pressed = null;            // {index, value} at the moment of pressing, while a pointer is down
  let frameAsked = 0;
  let restTimer = 0;
  let sizes = null;
  let themes = null;

  function mount() {
    const found = document.getElementById("ruler");
    if (!found) throw new Error("the page has no element #ruler");
    if (found === host && svg.isConnected) return;
    sizes?.disconnect();
    themes?.disconnect();
    host = found;
    svg = document.createElementNS("http://www.w3.org/2000/svg", "svg");
    svg.setAttribute("role", "slider");
    svg.setAttribute("tabindex", "0");
    svg.setAttribute("aria-label", "Resolution");
    svg.setAttribute("aria-orientation", "horizontal");
    svg.addEventListener("pointerdown", press);
    svg.addEventListener("pointermove", drag);
    svg.addEventListener("pointerup", release);
    svg.addEventListener("pointercancel", release);
    svg.addEventListener("keydown", key);
    host.append(svg);
    sizes = new ResizeObserver(redraw);
    sizes.observe(host);
    themes = new MutationObserver(redraw);
    themes.observe(document.documentElement, {
      attributes: true, attributeFilter: ["data-theme", "data-projector"],
    });
  }

  const readyPoints = () => ruler.grid.map((_, point) => point).filter((point) => parts.draw.isReady(ruler, point));

  /** The ready grid point nearest to a value, on the logarithmic axis; -1 if none is ready. */
  function nearest(wish) {
    const away = (point) => Math.abs(Math.log(ruler.grid[point] / wish));
    return readyPoints().reduce((best, point) => (best < 0 || away(point) < away(best) ? point : best), -1);
  }

  function redraw() {
    if (!ruler || !host?.clientWidth) return;
    drawn = parts.draw.draw(svg, ruler, host.clientWidth, host.clientHeight || 148);
    place();
  }

  function place() {
    if (drawn) parts.draw.placeMarker(drawn.marker, ruler, drawn.frame, index, value);
    const { write } = parts.scale;
    const set = (name, text) => svg.setAttribute(name, text);
    set("aria-valuemin", write(ruler.grid[0]));
    set("aria-valuemax", write(ruler.grid[ruler.grid.length - 1]));
    set("aria-valuenow", write(value));
    set("aria-valuetext", index < 0
      ? `resolution ${write(value)}, not computed yet`
      : `resolution ${write(value)}, ${ruler.modules[index]} ${ruler.modules[index] === 1 ? "module" : "modules"}`);
    set("aria-disabled", String(index < 0));
    set("aria-busy", String(Boolean(ruler.busy)));
  }

  /** Puts the marker on a grid point and tells the page at the next frame. */
  function moveTo(point) {
    if (point < 0 || (point === index && value === ruler.grid[point])) return;
    index = point;
    value = ruler.grid[point];
    place();
    if (!frameAsked) {
      frameAsked = requestAnimationFrame(() => {
        frameAsked = 0;
        corymb.ruler.onMove?.(index, value);
      });
    }
  }

  /** A last onMove that is still due comes before onRest. */
  function rest() {
    if (frameAsked) {
      cancelAnimationFrame(frameAsked);
      frameAsked = 0;
      corymb.ruler.onMove?.(index, value);
    }
    corymb.ruler.onRest?.(index, value);
  }

  function follow(event) {
    const box = svg.getBoundingClientRect();
    const { frame } = drawn;
    const pixel = ((event.clientX - box.left) / box.width) * frame.width;
    moveTo(nearest(frame.x.invert(Math.min(frame.box.right, Math.max(frame.box.left, pixel)))));
  }

  function press(event) {
    if (event.button !== 0 || !drawn) return;
    clearTimeout(restTimer);
    pressed = { value };
    svg.setPointerCapture(event.pointerId);
    svg.classList.add("held");
    follow(event);
  }

  function drag(event) {
    if (pressed) follow(event);
  }

  function release() {
    if (!pressed) return;
    const moved = pressed.value !== value;
    pressed = null;
    svg.classList.remove("held");
    if (moved) rest();
  }

  function key(event) {
    if (event.ctrlKey || event.metaKey || event.altKey || !ruler) return;
    const points = readyPoints();
    if (points.length === 0) return;
    const last = points.length - 1;
    let goal;
    if (event.key in KEYS) goal = Math.min(last, Math.max(0, points.indexOf(index) + KEYS[event.key]));
    else if (event.key === "Home") goal = 0;
    else if (event.key === "End") goal = last;
    else return;
    event.preventDefault();
    const before = value;
    moveTo(points[goal]);
    if (value === before) return;
    clearTimeout(restTimer);
    restTimer = setTimeout(rest, KEY_REST);
  }

  /**
   * Draws the ruler. While the marker is held, its place is the hand's, not the argument's.
   * @param {{grid: number[], modules: (number|null)[], low: number[], high: number[],
   *          plateaus: {from: number, to: number, strength: number}[], suggestion: number|null, value: number,
   *          label: string, busy: boolean}} what resolutions ascend; null modules are not computed yet
   */
  function draw(what) {
    mount();
    ruler = what.grid.length > 0 ? what : null;
    if (!ruler) {
      drawn = null;
      svg.replaceChildren();
      return;
    }
    if (!pressed) value = what.value;
    index = nearest(value);
    redraw();
  }

  corymb.ruler = { draw, onMove: null, onRest: null };
})();
