/* What Dash's side does, in small: fetches a study, colours the map, joins map and ruler. `ready` tells the tests. */
(() => {
  "use strict";
  const asked = new URLSearchParams(location.search);
  const url = `/data/${asked.get("data") || "906"}`;
  const heard = { picks: [], moves: [], rests: [] };

  async function colouring(study, kind) {
    const labels = new Uint16Array(await (await fetch(`${url}/${kind}`)).arrayBuffer());
    return { labels, ...study[kind] };
  }

  async function start() {
    for (const name of ["theme", "projector"]) {
      if (asked.has(name)) document.documentElement.dataset[name] = asked.get(name);
    }
    corymb.map.onPick = (what) => {
      heard.picks.push(what);
      corymb.map.select({
        module: what.kind === "module" ? what.index : null, genes: what.kind === "gene" ? [what.index] : [],
      });
    };
    corymb.ruler.onMove = (index, value) => {
      heard.moves.push([index, value]);
      document.getElementById("resolution").textContent = value;
    };
    corymb.ruler.onRest = (index, value) => heard.rests.push([index, value]);
    const stats = await corymb.map.load({ url, names: null, label: "saltmarsh moss" });
    document.getElementById("counts").textContent = `${stats.nodes.toLocaleString("en")} genes, ${stats.edges.toLocaleString("en")} interactions`;
    const study = await (await fetch(`${url}/study`)).json();
    const coarse = await colouring(study, "labels");
    const finer = await colouring(study, "finer");
    corymb.map.colour(coarse);
    corymb.map.select({ module: 1, genes: [] });
    corymb.ruler.draw(study.ruler);
    document.getElementById("swatch").style.background = study.labels.hues[1];
    window.tried = { coarse, finer, study, heard, ready: true };
  }

  for (const name of ["theme", "projector"]) {
    document.getElementById(name).addEventListener("click", () => {
      const { dataset } = document.documentElement;
      const on = name === "theme" ? "dark" : "on";
      dataset[name] = dataset[name] === on ? "off" : on;
    });
  }
  start();
})();
