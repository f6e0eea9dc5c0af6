/* What lies under a point of the screen: a gene, a module, or nothing. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});

  const TOLERANCE = 3;           // CSS pixels around a disc that still count as the disc
  const NOTHING = Object.freeze({ kind: "nothing", index: -1 });

  function treeOf(network) {
    if (!network.tree) {
      const { positions } = network;
      network.tree = window.d3.quadtree(
        Array.from({ length: network.n }, (_, node) => node),
        (node) => positions[2 * node],
        (node) => positions[2 * node + 1],
      );
    }
    return network.tree;
  }

  /** The disc that the point lies in, or is nearest to within the tolerance; -1 for none. */
  function geneAt(scene, view, theme, x, y) {
    const { network, look } = scene;
    const grow = parts.nodes.growth(view, theme);
    const planeX = (x - view.left) / view.scale;
    const planeY = (y - view.top) / view.scale;
    const widest = (look.largest * grow + TOLERANCE) / view.scale;
    let found = -1;
    let nearest = TOLERANCE;
    treeOf(network).visit((quad, left, top, right, bottom) => {
      if (!quad.length) {
        for (let leaf = quad; leaf; leaf = leaf.next) {
          const node = leaf.data;
          if (look.removed?.[node]) continue;
          const away = Math.hypot(network.positions[2 * node] - planeX, network.positions[2 * node + 1] - planeY)
            * view.scale - look.radii[node] * grow;
          if (away <= nearest) { nearest = away; found = node; }
        }
      }
      return left > planeX + widest || right < planeX - widest || top > planeY + widest || bottom < planeY - widest;
    });
    return found;
  }

  function plateAt(plates, x, y) {
    return plates.find((box) => (
      x >= box.left && x <= box.left + box.width && y >= box.top && y <= box.top + box.height
    ));
  }

  /** The module whose plate or shading lies there, else nothing. */
  function moduleAt(scene, view, x, y) {
    const plate = plateAt(scene.plates, x, y);
    if (plate) return { kind: "module", index: plate.module };
    if (!scene.field) return NOTHING;
    const module = parts.shading.moduleAt(scene.field, (x - view.left) / view.scale, (y - view.top) / view.scale);
    return module === null ? NOTHING : { kind: "module", index: module };
  }

  /** @returns {{kind: "gene"|"module"|"nothing", index: number}} plates lie above discs, discs above shading */
  function at(scene, view, theme, x, y) {
    const plate = plateAt(scene.plates, x, y);
    if (plate) return { kind: "module", index: plate.module };
    const gene = geneAt(scene, view, theme, x, y);
    return gene >= 0 ? { kind: "gene", index: gene } : moduleAt(scene, view, x, y);
  }

  parts.picking = { at, moduleAt };
})();
