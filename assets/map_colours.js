/* The map's colours: read from the style sheet, so that a theme is changed in one place only. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  /** @typedef {[number, number, number, number]} Rgba red, green, blue 0..255, alpha 0..1 */

  const CONFIDENCE_STEPS = 64;
  let pixel = null;

  /**
   * Any CSS colour, also one that the style sheet names as `var(--…)`, as numbers.
   * @param {HTMLElement} probe an element of the page whose `color` may be set
   * @param {string} css
   * @returns {Rgba}
   */
  function resolve(probe, css) {
    if (!pixel) {
      const canvas = document.createElement("canvas");
      canvas.width = canvas.height = 1;
      pixel = canvas.getContext("2d", { willReadFrequently: true });
    }
    probe.style.color = "";
    probe.style.color = css;
    pixel.clearRect(0, 0, 1, 1);
    pixel.fillStyle = getComputedStyle(probe).color;
    pixel.fillRect(0, 0, 1, 1);
    const [red, green, blue, alpha] = pixel.getImageData(0, 0, 1, 1).data;
    return [red, green, blue, alpha / 255];
  }

  /** @param {Rgba} from @param {Rgba} to @param {number} share @returns {Rgba} */
  function mix(from, to, share) {
    return from.map((value, index) => value + (to[index] - value) * share);
  }

  /** @param {Rgba} colour @param {number} [alpha] */
  function text(colour, alpha = colour[3]) {
    const [red, green, blue] = colour.map(Math.round);
    return `rgba(${red}, ${green}, ${blue}, ${alpha})`;
  }

  /** Low to high confidence in equal steps; lightness falls all the way, so it reads without telling hues apart. */
  function confidenceScale(low, middle, high) {
    return Array.from({ length: CONFIDENCE_STEPS }, (_, step) => {
      const share = step / (CONFIDENCE_STEPS - 1);
      return share < 0.5 ? mix(low, middle, share * 2) : mix(middle, high, share * 2 - 1);
    });
  }

  /**
   * Everything that the layers need to know of the style sheet.
   * @param {HTMLElement} probe
   */
  function readTheme(probe) {
    const style = getComputedStyle(document.documentElement);
    const number = (name, otherwise) => {
      const value = parseFloat(style.getPropertyValue(name));
      return Number.isFinite(value) ? value : otherwise;
    };
    const colour = (name) => resolve(probe, `var(${name})`);
    const known = new Map();
    return {
      paper: colour("--paper"),
      panel: colour("--panel"),
      ink: colour("--ink"),
      inkSoft: colour("--ink-soft"),
      leaf: colour("--leaf"),
      edge: colour("--map-edge"),
      edgeStrength: number("--map-edge-strength", 1),
      node: colour("--map-node"),
      grey: colour("--module-grey"),
      plate: colour("--map-plate"),
      shade: number("--map-shade", 0.2),
      shadeChosen: number("--map-shade-chosen", 0.4),
      stroke: number("--stroke", 1),
      disc: number("--disc", 1),
      noteSize: number("--note", 13),
      type: style.getPropertyValue("--type").trim() || "sans-serif",
      confidence: confidenceScale(
        colour("--confidence-low"), colour("--confidence-middle"), colour("--confidence-high"),
      ),
      /** @param {string} css @returns {Rgba} */
      hue(css) {
        if (!known.has(css)) known.set(css, resolve(probe, css));
        return known.get(css);
      },
    };
  }

  parts.colours = { readTheme, mix, text, CONFIDENCE_STEPS };
})();
