"use strict";
/* The scan field: "/" goes to it, the arrows walk its matches, Escape clears.
   A scanner types a code and Enter; the form then works without any of this. */

(() => {
  const field = () =>
    document.querySelector('[data-scan="main"]') ?? document.querySelector("[data-scan]");

  const writing = (element) =>
    element.isContentEditable || ["INPUT", "TEXTAREA", "SELECT"].includes(element.tagName);

  const focusField = () => {
    const scan = field();
    if (!scan) return;
    scan.focus();
    scan.select();
  };

  // What must be put right comes before the next scan.
  const settle = (root) => {
    const errors = root.querySelector("#errors");
    if (errors) {
      errors.focus();
    } else if (root.querySelector('[data-scan="main"]')) {
      focusField();
    } else {
      // Ready to type, but what stands above it (a caution, an overfull bottle) isn't scrolled away.
      root.querySelector("[data-focus]")?.focus({ preventScroll: true });
    }
  };

  const walk = (event, scan) => {
    const box = scan.form.querySelector("[data-matches]");
    const matches = [...box.querySelectorAll("[data-match]")];
    const stops = [scan, ...matches];
    const at = stops.indexOf(document.activeElement);
    if (at === -1 || matches.length === 0) return;
    const next = at + (event.key === "ArrowDown" ? 1 : -1);
    if (next < 0 || next >= stops.length) return;
    event.preventDefault();
    stops[next].focus();
  };

  const clear = (scan) => {
    scan.form.querySelector("[data-matches]").replaceChildren();
    scan.value = "";
    scan.focus();
  };

  document.addEventListener("keydown", (event) => {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    if (event.key === "/" && !writing(event.target)) {
      event.preventDefault();
      focusField();
      return;
    }
    const scan = event.target.closest?.(".scan")?.querySelector("[data-scan]");
    if (scan && (event.key === "ArrowDown" || event.key === "ArrowUp")) walk(event, scan);
    if (scan && event.key === "Escape") clear(scan);
    const menu = event.target.closest?.("[data-menu][open]");
    if (menu && event.key === "Escape") {
      menu.open = false;
      menu.querySelector("summary").focus();
    }
  });

  // A menu closes when one goes on elsewhere, and matches leave with the focus.
  document.addEventListener("focusin", (event) => {
    for (const menu of document.querySelectorAll("[data-menu][open]")) {
      if (!menu.contains(event.target)) menu.open = false;
    }
    for (const box of document.querySelectorAll("[data-matches]")) {
      if (!box.closest(".scan").contains(event.target)) box.replaceChildren();
    }
  });

  document.addEventListener("click", (event) => {
    for (const menu of document.querySelectorAll("[data-menu][open]")) {
      if (!menu.contains(event.target)) menu.open = false;
    }
  });

  settle(document);
  document.addEventListener("htmx:afterSettle", (event) => {
    if (event.detail.elt.querySelector?.("#errors")) settle(event.detail.elt);
  });
})();
