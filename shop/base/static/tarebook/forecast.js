"use strict";
/* A late answer never takes the place of a newer one: each question carries its number. Folds that were open stay so. */

(() => {
  const HEADER = "X-Live-Number";
  let asked = 0;
  let shown = 0;

  document.addEventListener("htmx:configRequest", (event) => {
    if (!event.target.closest("[data-live]")) return;
    asked += 1;
    event.detail.headers[HEADER] = String(asked);
  });
  document.addEventListener("htmx:beforeSwap", (event) => {
    const number = Number(event.detail.requestConfig?.headers?.[HEADER] || 0);
    if (!number || event.detail.xhr.status >= 400) return;
    if (number < shown) event.detail.shouldSwap = false;
    else shown = number;
  });

  let open = [];
  document.addEventListener("htmx:beforeSwap", () => {
    open = [...document.querySelectorAll("[data-keeps][open]")].map((fold) => fold.id);
  });
  document.addEventListener("htmx:afterSwap", () => {
    for (const id of open) document.getElementById(id)?.setAttribute("open", "");
  });

  // Fields that follow another station keep what was typed while the answer came; its scale's check begins anew.
  const FIELDS = "input:not([type=hidden]):not([name^=check_]), select";
  const ticks = (field) => field.type === "checkbox" || field.type === "radio";
  let typed = new Map();
  document.addEventListener("htmx:oobBeforeSwap", (event) => {
    const fields = [...event.target.querySelectorAll(FIELDS)];
    typed = new Map(fields.map((field) => [field.id, ticks(field) ? field.checked : field.value]));
  });
  document.addEventListener("htmx:oobAfterSwap", () => {
    for (const [id, value] of typed) {
      const field = document.getElementById(id);
      if (field && ticks(field)) field.checked = value;
      else if (field) field.value = value;
    }
    typed = new Map();
  });

  // A fold that is dear to fill is asked for when it's opened, and again once the readings rest.
  const RESTS = 700;
  let resting = 0;
  const want = (fold) => fold.querySelector("[hx-post]")?.dispatchEvent(new CustomEvent("wanted"));
  const changed = () => {
    clearTimeout(resting);
    resting = setTimeout(() => document.querySelectorAll("[data-lazy][open]").forEach(want), RESTS);
  };

  document.addEventListener(
    "toggle",
    (event) => {
      if (event.target.matches("[data-lazy][open]")) want(event.target);
    },
    true,
  );
  for (const kind of ["input", "change"]) document.addEventListener(kind, changed);
})();
