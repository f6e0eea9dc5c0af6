// Joins Dash's callbacks to the map and the ruler. The only place where the two know of each other.
"use strict";

(() => {
  const palette = [
    "#0072b2", "#e69f00", "#009e73", "#cc79a7", "#56b4e9", "#d55e00", "#5b4ea3", "#b3a800",
    "#3d7a2b", "#a0522d", "#1f9e9a", "#c2478b", "#7a6ff0", "#8c6d1f",
  ];
  const none = 0xffff;
  const NATURAL = 1.5; // the close-up of a few genes is not blown up further
  const state = {
    network: null, // address of the network on the map
    loaded: Promise.resolve(),
    sizeCut: 5,
    shown: null, // decoded colours of the study shown
    names: {},
    ruler: null, // last data of the ruler
    wanted: null,
    cache: new Map(), // address → decoded colours, newest last
    degrees: new Uint32Array(0),
    painted: null, // decoded colours on the map now
    pick: null,
    dragging: false,
    turn: 0,
    previews: 0, // counts previews asked for; an older one that comes late is not painted
  };
  const noUpdate = () => window.dash_clientside.no_update;
  const setProps = (id, props) => window.dash_clientside.set_props(id, props);
  const text = (id, value) => {
    const element = document.getElementById(id);
    if (element && element.textContent !== value) element.textContent = value;
  };

  // --- colours -------------------------------------------------------------------------------------------------

  /** Decodes what the server packs: counts, a hue per module, a module per node. */
  function decode(buffer) {
    const [modules, nodes] = new Uint32Array(buffer, 0, 2);
    const hues = new Uint16Array(buffer, 8, modules);
    const labels = new Uint16Array(buffer.slice(8 + 2 * modules, 8 + 2 * modules + 2 * nodes));
    const sizes = new Uint32Array(modules);
    for (const label of labels) if (label !== none) sizes[label] += 1;
    return { modules, hues, labels, sizes };
  }

  async function colours(url) {
    if (state.cache.has(url)) return state.cache.get(url);
    const answer = await fetch(url);
    if (!answer.ok) return null;
    const decoded = decode(await answer.arrayBuffer());
    state.cache.set(url, decoded);
    while (state.cache.size > 90) state.cache.delete(state.cache.keys().next().value);
    return decoded;
  }

  function paint(decoded, names) {
    state.painted = decoded;
    const numbers = [];
    for (let module = 0; module < decoded.modules; module += 1) {
      const number = `M${module + 1}`;
      numbers.push(names[number] ? `${number} ${names[number]}` : number);
    }
    window.corymb.map.colour({
      labels: decoded.labels,
      hues: Array.from(decoded.hues, (hue) => palette[hue % palette.length]),
      numbers,
      grey: Uint8Array.from(decoded.sizes, (size) => (size < state.sizeCut ? 1 : 0)),
    });
    if (state.pick && state.pick.kind === "module") light();
  }

  /** The module that a pick means on the map now: it is known by a gene, whatever its number has become. */
  function moduleOf(pick) {
    if (pick.leader === undefined || !state.painted) return pick.index;
    const label = state.painted.labels[pick.leader];
    return label === none ? null : label;
  }

  /** The best-connected gene of a module on the map now. */
  function leaderOf(module) {
    let leader = -1;
    state.painted.labels.forEach((label, node) => {
      if (label === module && (leader < 0 || state.degrees[node] > state.degrees[leader])) leader = node;
    });
    return leader;
  }

  function light() {
    const pick = state.pick;
    const kind = pick ? pick.kind : "nothing";
    const module = kind === "module" ? moduleOf(pick) : null;
    const genes = kind === "gene" ? [pick.index] : kind === "list" ? pick.genes : [];
    window.corymb.map.select({ module, genes });
    return { module, genes };
  }

  /** Colours by the partition that the map was drawn from, until anything else is ready. */
  async function paintAnchor(url) {
    const decoded = await colours(`${url}/anchor`);
    if (decoded && state.network === url && !state.painted) paint(decoded, {});
  }

  function describe(decoded, resolution) {
    if (resolution !== null) text("state-resolution", resolution < 10 ? resolution.toPrecision(2) : resolution.toFixed(0));
    const large = decoded.sizes.reduce((count, size) => count + (size >= state.sizeCut ? 1 : 0), 0);
    const count = decoded.modules.toLocaleString("en");
    text("state-count", `${count} modules, ${large.toLocaleString("en")} of ${state.sizeCut} genes or more`);
  }

  const isOnMap = (ruler) => state.network === `/data/${ruler.network}`;
  const rulerUrl = (ruler, index) => `/data/${ruler.network}/ruler/${ruler.quality}/${index}?v=${ruler.version}`;

  /** Fetches the partitions of the ruler ahead, nearest to the marker first, so that the marker never waits. */
  async function fetchAhead() {
    const turn = (state.turn += 1);
    const { ruler } = state;
    if (!ruler || ruler.busy) return;
    await state.loaded;
    if (!isOnMap(ruler)) return; // begun again once its network is
    const here = nearest(ruler.grid, state.wanted ? state.wanted.resolution : 1);
    const order = ruler.grid.map((_, index) => index).sort((a, b) => Math.abs(a - here) - Math.abs(b - here));
    for (const index of order) {
      if (turn !== state.turn || state.ruler !== ruler) return;
      if (ruler.modules[index] !== null) await colours(rulerUrl(ruler, index));
    }
  }

  /** The ready point of the ruler that is nearest to a resolution; −1 where none is ready. */
  function nearestReady(ruler, value) {
    const ready = ruler.grid.map((_, index) => index).filter((index) => ruler.modules[index] !== null);
    return ready.length ? ready[nearest(ready.map((index) => ruler.grid[index]), value)] : -1;
  }

  function nearest(grid, value) {
    let best = 0;
    grid.forEach((each, index) => {
      if (Math.abs(Math.log(each / value)) < Math.abs(Math.log(grid[best] / value))) best = index;
    });
    return best;
  }

  async function preview(index) {
    if (index < 0) return;
    const { ruler } = state; // another may take its place while we wait
    await state.loaded;
    if (!isOnMap(ruler)) return;
    const turn = (state.previews += 1);
    const decoded = await colours(rulerUrl(ruler, index));
    if (!decoded || turn !== state.previews || !isOnMap(ruler)) return;
    paint(decoded, {});
    describe(decoded, ruler.grid[index]);
  }

  // --- called by Dash ------------------------------------------------------------------------------------------

  const callbacks = {
    load(order) {
      if (!order || state.network === order.url) return noUpdate();
      state.network = order.url;
      state.cache.clear();
      state.shown = null;
      state.painted = null;
      if (state.ruler?.network !== order.fingerprint) state.ruler = null; // the ruler's data may come before the map's
      state.loaded = Promise.all([
        window.corymb.map.load({ url: order.url, names: null, label: order.label }),
        fetch(`${order.url}/degrees`)
          .then((answer) => answer.arrayBuffer())
          .then((buffer) => (state.degrees = new Uint32Array(buffer))),
      ]).then(() => paintAnchor(order.url));
      state.loaded.then(fetchAhead);
      return noUpdate();
    },

    async colour(shown, _names, order, sizeCut, station) {
      state.sizeCut = Math.max(1, Number(sizeCut) || 1);
      if (!order || !shown || shown.network !== order.fingerprint) {
        if (state.shown) paint(state.shown, state.names);
        return noUpdate();
      }
      await state.loaded;
      const url = `/data/study/${shown.study}`;
      const [decoded, names] = await Promise.all([colours(url), fetch(`${url}/names`).then((answer) => answer.json())]);
      if (!decoded || state.network !== order.url) return noUpdate();
      state.previews += 1;
      state.shown = decoded;
      state.names = names;
      if (!state.dragging) {
        paint(decoded, names);
        describe(decoded, null);
      }
      await confidence(url, station === "trust");
      return noUpdate();
    },

    ruler(data, wanted, shown) {
      state.wanted = wanted;
      const known = data && wanted && data.network === wanted.network && data.quality === wanted.quality;
      const questions = document.querySelectorAll("#question-switch button");
      questions.forEach((button) => {
        const asked = wanted && wanted.method === "leiden" && JSON.parse(button.id).quality === wanted.quality;
        button.setAttribute("aria-pressed", asked ? "true" : "false");
      });
      if (wanted) {
        const optimised = wanted.method === "leiden" || wanted.method === "louvain";
        text("state-unit", !optimised ? "" : wanted.quality === "cpm" ? "inside density" : "resolution");
        if (!state.dragging) text("state-resolution", optimised ? Number(wanted.resolution).toPrecision(2) : "");
      }
      if (!known) return noUpdate();
      const before = state.ruler;
      state.ruler = data;
      window.corymb.ruler.draw({
        ...data,
        value: wanted.resolution,
        label: "number of modules (the band widens where copies of the network disagree)",
      });
      if (!before || before.version !== data.version || before.network !== data.network || before.quality !== data.quality) {
        fetchAhead();
      }
      const optimised = wanted.method === "leiden" || wanted.method === "louvain";
      const answered =
        shown && ["network", "method", "quality", "resolution"].every((key) => shown[key] === wanted[key]);
      const ready = nearestReady(data, wanted.resolution);
      const isNear = ready >= 0 && Math.abs(ready - nearest(data.grid, wanted.resolution)) <= 1;
      if (optimised && !answered && !state.dragging && isNear) preview(ready);
      return noUpdate();
    },

    async select(pick) {
      await state.loaded;
      state.pick = pick;
      const { module, genes } = light();
      if (pick && pick.focus && (genes.length || module !== null)) {
        window.corymb.map.focus(module !== null ? { module } : { genes });
      }
      return noUpdate();
    },

    fit(elements, kind) {
      if (kind !== "close-up" || !elements || !elements.length) return noUpdate();
      window.setTimeout(() => {
        const cy = document.getElementById("closeup")?._cyreg?.cy;
        if (!cy) return;
        dress(cy);
        cy.resize();
        cy.fit(undefined, 40);
        if (cy.zoom() > NATURAL) {
          cy.zoom(NATURAL);
          cy.center();
        }
      }, 60);
      return noUpdate();
    },

    /** Another station or passport is read from its beginning. */
    top() {
      const body = document.getElementById("pane-body");
      if (body) body.scrollTop = 0;
      return noUpdate();
    },

    save(order) {
      if (!order) return noUpdate();
      const anchor = document.createElement("a");
      anchor.href = order.url;
      anchor.download = "";
      document.body.append(anchor);
      anchor.click();
      anchor.remove();
      return noUpdate();
    },

    theme(clicks) {
      if (clicks) remember("theme", document.documentElement.dataset.theme === "dark" ? "light" : "dark");
      dress(document.getElementById("closeup")?._cyreg?.cy);
      return noUpdate();
    },

    projector(clicks) {
      if (clicks) remember("projector", document.documentElement.dataset.projector === "on" ? "off" : "on");
      return noUpdate();
    },
  };

  /** Puts the colours of the theme at hand on the close-up. */
  function dress(cy) {
    const { theme } = document.documentElement.dataset;
    if (!cy || cy.scratch("theme") === (theme || "light")) return;
    cy.scratch("theme", theme || "light");
    const list = getComputedStyle(document.documentElement);
    const colour = (name) => list.getPropertyValue(name).trim();
    const [ink, soft, paper, line] = ["--ink", "--ink-soft", "--paper", "--module-grey"].map(colour);
    cy.style()
      .selector("node").style({ color: ink, "text-background-color": paper, "border-color": paper })
      .selector("node.outside").style({ color: soft, "background-blacken": theme === "dark" ? 0.45 : -0.5 })
      .selector("node.centre, node:selected").style({ "border-color": ink })
      .selector("edge").style({ "line-color": line })
      .selector("edge.inside").style({ "line-color": soft })
      .update();
  }

  async function confidence(url, on) {
    text("legend-text", `colour: ${on ? "how surely it stays" : "module"} · size: degree · grey: modules under `);
    if (!on) {
      window.corymb.map.confidence(null, false);
      return;
    }
    const answer = await fetch(`${url}/confidence`);
    if (answer.ok) window.corymb.map.confidence(new Float32Array(await answer.arrayBuffer()), true);
  }

  function remember(key, value) {
    document.documentElement.dataset[key] = value;
    try {
      localStorage.setItem(`corymb-${key}`, value);
    } catch (error) {
      if (!(error instanceof DOMException)) throw error; // a browser that keeps nothing: the choice holds until reload
    }
  }

  function recall(key) {
    try {
      return localStorage.getItem(`corymb-${key}`);
    } catch (error) {
      if (!(error instanceof DOMException)) throw error;
      return null;
    }
  }

  // --- uploads -------------------------------------------------------------------------------------------------

  /** Sends a file; `kind` is "network", or which file of the gene sets it is. */
  async function upload(file, kind) {
    const drop = document.querySelector(kind === "network" ? "#drop" : `[data-upload="${kind}"]`);
    if (drop) drop.dataset.busy = "yes";
    const form = new FormData();
    form.append("file", file);
    form.append("kind", kind);
    let answer;
    try {
      const response = await fetch("/upload", { method: "POST", body: form });
      answer = response.headers.get("Content-Type")?.includes("json")
        ? await response.json()
        : { fault: response.status === 413 ? `${file.name}: is larger than can be taken; gzip it or cut it by score.` : `${file.name}: could not be taken (status ${response.status}).` };
    } catch (error) {
      answer = { fault: `${file.name}: could not be sent; is corymb still running? (${error.message})` };
    }
    if (drop) delete drop.dataset.busy;
    setProps(kind === "network" ? "from-upload" : "from-gene-sets", { data: { ...answer, moment: Date.now() } });
  }

  /** What a file is that is dropped or chosen here: what the place asks for, else what the station at hand asks for. */
  function kindAt(target) {
    const asking = target?.closest?.("[data-upload]") || document.querySelector(".drop[data-upload]");
    return asking && !target?.closest?.("#drop") ? asking.dataset.upload : "network";
  }

  function choose(kind) {
    const picker = document.createElement("input");
    picker.type = "file";
    picker.addEventListener("change", () => picker.files.length && upload(picker.files[0], kind));
    picker.click();
  }

  document.addEventListener("click", (event) => {
    const asking = event.target.closest && event.target.closest("#drop, [data-upload]");
    if (asking) choose(kindAt(asking));
  });
  document.addEventListener("dragover", (event) => {
    if (!event.dataTransfer || !Array.from(event.dataTransfer.types).includes("Files")) return;
    event.preventDefault();
    const drop = document.querySelector("#drop, .drop[data-upload]");
    if (drop) drop.dataset.over = "yes";
  });
  document.addEventListener("dragleave", () => {
    const drop = document.querySelector("#drop, .drop[data-upload]");
    if (drop) delete drop.dataset.over;
  });
  document.addEventListener("drop", (event) => {
    if (!event.dataTransfer || !event.dataTransfer.files.length) return;
    event.preventDefault();
    upload(event.dataTransfer.files[0], kindAt(event.target));
  });

  // --- keys ----------------------------------------------------------------------------------------------------

  document.addEventListener("keydown", (event) => {
    const typing = /^(INPUT|TEXTAREA|SELECT)$/.test(document.activeElement?.tagName || "");
    const drop = document.activeElement?.matches("#drop, .drop[data-upload]");
    if (drop && (event.key === "Enter" || event.key === " ")) {
      event.preventDefault();
      choose(kindAt(document.activeElement));
    } else if (event.key === "/" && !typing) {
      event.preventDefault();
      document.getElementById("find")?.focus();
    } else if (event.key === "Escape") {
      document.activeElement?.blur?.();
      setProps("from-map", { data: { kind: "nothing", index: -1, moment: Date.now() } });
    }
  });

  // --- from the map and the ruler --------------------------------------------------------------------------------

  window.corymb = window.corymb || {};
  function join() {
    window.corymb.map.onPick = (picked) => {
      const leader = picked.kind === "module" && state.painted ? { leader: leaderOf(picked.index) } : {};
      setProps("from-map", { data: { ...picked, ...leader, moment: Date.now() } });
    };
    window.corymb.ruler.onMove = (index) => {
      state.dragging = true;
      preview(index);
    };
    window.corymb.ruler.onRest = (index, value) => {
      state.dragging = false;
      preview(index);
      setProps("from-ruler", { data: { index, value, moment: Date.now() } });
    };
  }

  // --- tables ----------------------------------------------------------------------------------------------------

  const numberOf = (value) => Number(String(value ?? "").replace(/^M/, "")) || 0;
  window.dashAgGridFunctions = window.dashAgGridFunctions || {};
  window.dashAgGridFunctions.corymbByNumber = (one, other) => numberOf(one) - numberOf(other);
  window.dashAgGridFunctions.corymbLeave = () => false;
  window.dashAgGridFunctions.corymbOpen = (params, setGridProps) => {
    if (params.event.key !== "Enter") return;
    const { value, column, rowIndex, node } = params;
    setGridProps({ cellClicked: { value, colId: column.getColId(), rowIndex, rowId: node.id, timestamp: Date.now() } });
  };
  window.dashAgGridComponentFunctions = window.dashAgGridComponentFunctions || {};
  window.dashAgGridComponentFunctions.ModuleCell = (props) =>
    window.React.createElement("span", null, [
      window.React.createElement("span", {
        key: "swatch",
        className: "swatch",
        style: { background: props.data.hue < 0 || props.data.size < 3 ? "#9aa5a3" : palette[props.data.hue % palette.length] },
      }),
      window.React.createElement("span", { key: "number" }, ` ${props.value}`),
    ]);

  for (const key of ["theme", "projector"]) {
    const kept = recall(key);
    if (kept) document.documentElement.dataset[key] = kept;
  }
  document.addEventListener("DOMContentLoaded", join);
  if (document.readyState !== "loading") join();
  window.dash_clientside = Object.assign({}, window.dash_clientside, { corymb: callbacks });
})();
