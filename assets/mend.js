// Mends what Dash's own controls tell screen readers and the Tab key: a list of radio buttons or check boxes says that it
// is a list box, and the button of a drop-down is hidden behind a field that takes its focus.
"use strict";

(() => {
  const LISTS = ".dash-radioitems, .dash-checklist";

  const still = (element, ...names) => names.forEach((name) => element.hasAttribute(name) && element.removeAttribute(name));

  function mendList(list) {
    still(list, "role");
    list.querySelectorAll(".dash-options-list-option").forEach((option) => still(option, "role", "aria-selected"));
  }

  function mend(place) {
    if (place.matches(LISTS)) mendList(place);
    place.querySelectorAll(LISTS).forEach(mendList);
    place.querySelectorAll(".dash-dropdown-focus-target").forEach((field) => {
      field.tabIndex = -1;
      const button = field.parentElement.querySelector("button.dash-dropdown");
      if (button) button.tabIndex = 0;
    });
  }

  new MutationObserver((changes) => changes.forEach(({ target, addedNodes }) => {
    const list = target.closest?.(LISTS);
    if (list) mendList(list);
    addedNodes.forEach((node) => node.nodeType === Node.ELEMENT_NODE && mend(node));
  })).observe(document, { childList: true, subtree: true, attributes: true, attributeFilter: ["role", "aria-selected"] });
})();
