// Builds the reading pane's plain tables from data. Dash keeps a record of every component, and a table of some hundred
// rows made of components takes it seconds; here the whole table is one component, and its rows are the browser's alone.
"use strict";

(() => {
  const kinds = new Set(["Table", "Thead", "Tbody", "Tr", "Th", "Td", "Span", "Strong", "Small", "Kbd", "Code", "Button"]);
  const pick = (what) => window.dash_clientside.set_props("from-pane", { data: { ...what, moment: Date.now() } });

  /** @param {string|number|null|Array|{type: string, props: object}} part a Dash component of `html`, as plain data */
  function build(part) {
    if (part === null || part === undefined) return document.createTextNode("");
    if (Array.isArray(part)) {
      const all = document.createDocumentFragment();
      all.append(...part.map(build));
      return all;
    }
    if (typeof part !== "object") return document.createTextNode(String(part));
    if (!kinds.has(part.type)) throw new Error(`a table cannot hold ${part.type}`);
    const element = document.createElement(part.type);
    Object.entries(part.props).forEach(([name, value]) => give(element, name, value));
    return element;
  }

  function give(element, name, value) {
    if (value === null || name === "n_clicks") return;
    if (name === "children") element.append(build(value));
    else if (name === "className") element.className = value;
    else if (name === "style") Object.assign(element.style, value);
    else if (name === "id") element.addEventListener("click", () => pick(value));
    else element.setAttribute(name, value);
  }

  const fill = (place) => place.replaceChildren(build(JSON.parse(place.dataset.table)));

  function seek(node) {
    if (node.nodeType !== Node.ELEMENT_NODE) return;
    if (node.dataset.table) fill(node);
    node.querySelectorAll("[data-table]").forEach(fill);
  }

  new MutationObserver((changes) => changes.forEach((change) => {
    if (change.type === "attributes") fill(change.target);
    else change.addedNodes.forEach(seek);
  })).observe(document, { childList: true, subtree: true, attributes: true, attributeFilter: ["data-table"] });
})();
