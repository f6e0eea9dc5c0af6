/* Fetches a network for the map: positions, edges, degrees and names, side by side. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.mapParts = corymb.mapParts || {});


  async function fetchPart(url, kind) {
    const answer = await fetch(url, { credentials: "same-origin" });
    if (!answer.ok) throw new Error(`${url} answered ${answer.status}`);
    return kind === "json" ? answer.json() : answer.arrayBuffer();
  }

  /** Smallest box around all nodes, never of zero size. */
  function boundsOf(positions) {
    let left = Infinity, right = -Infinity, top = Infinity, bottom = -Infinity;
    for (let i = 0; i < positions.length; i += 2) {
      const x = positions[i], y = positions[i + 1];
      if (x < left) left = x;
      if (x > right) right = x;
      if (y < top) top = y;
      if (y > bottom) bottom = y;
    }
    if (!(right >= left)) return { left: 0, top: 0, width: 1, height: 1 };
    const least = Math.max(right - left, bottom - top, 1e-6) * 0.02;
    if (right - left < least) { left -= least; right += least; }
    if (bottom - top < least) { top -= least; bottom += least; }
    return { left, top, width: right - left, height: bottom - top };
  }

  /** Typical distance between neighbours: square root of the occupied area per node, counted on a coarse grid. */
  function spacingOf(positions, bounds) {
    const coarse = Math.min(48, Math.max(4, Math.sqrt(positions.length / 2)));
    const side = Math.max(bounds.width, bounds.height) / coarse;
    const columns = Math.ceil(bounds.width / side) + 1;
    const taken = new Uint8Array(columns * (Math.ceil(bounds.height / side) + 1));
    let cells = 0;
    for (let i = 0; i < positions.length; i += 2) {
      const cell = Math.floor((positions[i + 1] - bounds.top) / side) * columns
        + Math.floor((positions[i] - bounds.left) / side);
      if (!taken[cell]) { taken[cell] = 1; cells += 1; }
    }
    return Math.sqrt((cells * side * side) / Math.max(1, positions.length / 2));
  }

  /** Node numbers from low to high degree: hubs are drawn last and lie on top. */
  function orderByDegree(degrees) {
    const order = Uint32Array.from(degrees.keys());
    return order.sort((first, second) => degrees[first] - degrees[second]);
  }

  function checkLengths(network) {
    const { n, positions, edges, names } = network;
    if (positions.length !== 2 * n) throw new Error(`positions for ${positions.length / 2} nodes, degrees for ${n}`);
    if (names.length !== n) throw new Error(`${names.length} names for ${n} nodes`);
    if (edges.length % 2) throw new Error("the list of edges ends in the middle of an edge");
  }

  /**
   * @param {{url: string, names: string[]|null, label: string}} source
   * @returns {Promise<object>} the network: n, m, positions, edges, degrees, names, bounds, spacing, order
   */
  async function fetchNetwork(source) {
    const [positions, edges, degrees, names] = await Promise.all([
      fetchPart(`${source.url}/positions`),
      fetchPart(`${source.url}/edges`),
      fetchPart(`${source.url}/degrees`),
      source.names || fetchPart(`${source.url}/names`, "json"),
    ]);
    const network = {
      label: source.label || "",
      positions: new Float32Array(positions),
      edges: new Uint32Array(edges),
      degrees: new Uint32Array(degrees),
      names,
    };
    network.n = network.degrees.length;
    network.m = network.edges.length / 2;
    checkLengths(network);
    network.bounds = boundsOf(network.positions);
    network.spacing = spacingOf(network.positions, network.bounds);
    network.order = orderByDegree(network.degrees);
    return network;
  }

  parts.data = { fetchNetwork };
})();
