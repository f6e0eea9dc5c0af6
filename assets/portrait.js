// The Portrait station: the slider that takes the best connected genes off the map, and the saving of figures.
"use strict";

(() => {
  const MOST = 50; // per cent of the genes
  const removal = { url: null, share: 0, order: null, degrees: null, edges: null, turn: 0 };

  // --- saving --------------------------------------------------------------------------------------------------

  function save(blob, name) {
    const anchor = document.createElement("a");
    anchor.href = URL.createObjectURL(blob);
    anchor.download = name;
    document.body.append(anchor);
    anchor.click();
    anchor.remove();
    window.setTimeout(() => URL.revokeObjectURL(anchor.href), 10_000);
  }

  function pixels(image, name) {
    const canvas = document.createElement("canvas");
    const wide = 1320; // three times what is drawn on screen, for print
    canvas.width = wide;
    canvas.height = Math.round((wide * image.naturalHeight) / image.naturalWidth);
    const context = canvas.getContext("2d");
    context.fillStyle = "#ffffff";
    context.fillRect(0, 0, canvas.width, canvas.height);
    context.drawImage(image, 0, 0, canvas.width, canvas.height);
    canvas.toBlob((blob) => save(blob, name), "image/png");
  }

  document.addEventListener("click", (event) => {
    const button = event.target.closest?.("[data-save]");
    const figure = button?.closest("figure");
    if (!figure) return;
    const kind = button.dataset.save;
    const name = `${figure.dataset.name}.${kind}`;
    const image = figure.querySelector("img");
    if (kind === "csv") save(new Blob([figure.dataset.csv], { type: "text/csv" }), name);
    else if (kind === "png") pixels(image, name);
    else save(new Blob([decodeURIComponent(image.src.slice(image.src.indexOf(",") + 1))], { type: "image/svg+xml" }), name);
  });

  // --- removal -------------------------------------------------------------------------------------------------

  /** Fetches degrees and edges of the network, and ranks its genes: the best connected first, then as they stand. */
  async function learn(url) {
    const [degrees, edges] = await Promise.all(
      ["degrees", "edges"].map((part) => fetch(`${url}/${part}`).then((answer) => answer.arrayBuffer())),
    );
    if (removal.url !== url) return false;
    removal.degrees = new Uint32Array(degrees);
    removal.edges = new Uint32Array(edges);
    removal.order = Array.from(removal.degrees.keys()).sort((a, b) => removal.degrees[b] - removal.degrees[a] || a - b);
    return true;
  }

  /** The number of components that are left, and the size of the largest, by union-find. */
  function pieces(mask) {
    const parent = Int32Array.from(mask.keys());
    const size = new Int32Array(mask.length).fill(1);
    const root = (node) => {
      while (parent[node] !== node) node = parent[node] = parent[parent[node]];
      return node;
    };
    let count = mask.reduce((left, gone) => left + (gone ? 0 : 1), 0);
    let largest = count ? 1 : 0;
    for (let place = 0; place < removal.edges.length; place += 2) {
      if (mask[removal.edges[place]] || mask[removal.edges[place + 1]]) continue;
      let one = root(removal.edges[place]);
      let other = root(removal.edges[place + 1]);
      if (one === other) continue;
      if (size[one] < size[other]) [one, other] = [other, one];
      parent[other] = one;
      size[one] += size[other];
      largest = Math.max(largest, size[one]);
      count -= 1;
    }
    return { count, largest };
  }

  function describe(area, gone, mask) {
    const { count, largest } = pieces(mask);
    const share = Math.round((100 * largest) / mask.length);
    const least = gone ? removal.degrees[removal.order[gone - 1]] : 0;
    const genes = gone === 1 ? "1 gene" : `${gone.toLocaleString("en")} genes`;
    const taken = gone ? `${genes} gone, all of ${least} edges or more` : "None removed";
    const parts = count === 1 ? "1 component" : `${count.toLocaleString("en")} components`;
    area.querySelector("output").textContent = `${taken}: the largest component holds ${share}\u00a0% of all genes; ${parts}.`;
  }

  async function remove(area, share) {
    const turn = (removal.turn += 1);
    removal.share = share;
    try {
      if (!removal.order && !(await learn(area.dataset.url))) return;
    } catch (error) {
      area.querySelector("output").textContent = `The network could not be fetched; is corymb still running? (${error.message})`;
      return;
    }
    if (turn !== removal.turn) return;
    const gone = Math.round((removal.order.length * share) / 100);
    const mask = new Uint8Array(removal.order.length);
    for (const node of removal.order.slice(0, gone)) mask[node] = 1;
    window.corymb.map.remove(gone ? mask : null);
    describe(area, gone, mask);
  }

  function furnish(area) {
    const label = document.createElement("label");
    const slider = document.createElement("input");
    const told = document.createElement("output");
    label.textContent = "Remove the best connected genes from the map";
    Object.assign(slider, { type: "range", id: "removal-slider", min: 0, max: MOST, step: 0.5, value: removal.share });
    slider.setAttribute("aria-valuetext", `${removal.share} per cent of the genes`);
    label.htmlFor = slider.id;
    told.className = "hint";
    told.htmlFor = slider.id;
    slider.addEventListener("input", () => {
      slider.setAttribute("aria-valuetext", `${slider.value} per cent of the genes`);
      remove(area, Number(slider.value));
    });
    area.replaceChildren(label, slider, told);
    remove(area, removal.share);
  }

  /** Follows the pane: furnishes the slider's place when it appears, puts all genes back when it goes. */
  function follow() {
    const area = document.getElementById("removal-area");
    if (!area) {
      if (removal.share) window.corymb.map.remove(null);
      removal.share = 0;
      return;
    }
    const other = removal.url !== area.dataset.url;
    if (other) Object.assign(removal, { url: area.dataset.url, share: 0, order: null, degrees: null, edges: null });
    if (other || !area.querySelector("input")) furnish(area);
  }

  let due = 0;
  new MutationObserver(() => {
    if (!due) due = window.requestAnimationFrame(() => { due = 0; follow(); });
  }).observe(document.documentElement, { childList: true, subtree: true, attributeFilter: ["data-url"] });
})();
