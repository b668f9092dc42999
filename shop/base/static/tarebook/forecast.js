"use strict";
/* A late answer never takes the place of a newer one: each question carries its number. */

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
})();
