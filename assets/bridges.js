// Bridges on the map: genes taken out leave it with their edges; while none is, all but the bridges step back.
"use strict";

(() => {
  let drawn = false; // whether the map wears a mask of ours

  function maskOf(count, nodes, inside) {
    const mask = new Uint8Array(count).fill(inside ? 0 : 1);
    nodes.forEach((node) => { mask[node] = inside ? 1 : 0; });
    return mask;
  }

  const callbacks = {
    /** @param {{genes: number, gone: number[], lit: number[]}|null} order */
    mask(order) {
      const { map } = window.corymb;
      const fits = order && map.stats().nodes === order.genes;
      if (fits || drawn) {
        map.remove(fits && order.gone.length ? maskOf(order.genes, order.gone, true) : null);
        map.dim(fits && order.lit.length ? maskOf(order.genes, order.lit, false) : null);
      }
      drawn = Boolean(fits);
      return window.dash_clientside.no_update;
    },
  };

  window.dash_clientside = Object.assign({}, window.dash_clientside, { corymb_bridges: callbacks });
})();
