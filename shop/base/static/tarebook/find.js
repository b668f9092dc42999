"use strict";
/* The scan field as a combobox: what is offered while typing is chosen by arrows and Enter.
   The focus stays in the field. Without this the field is a plain form with a page of results. */

(() => {
  const parts = (field) => {
    const list = field.form.querySelector('[role="listbox"]');
    return { list, options: list ? [...list.querySelectorAll('[role="option"]')] : [] };
  };

  const chosen = (field) => {
    const id = field.getAttribute("aria-activedescendant");
    return id ? document.getElementById(id) : null;
  };

  const choose = (field, option) => {
    for (const other of parts(field).options) other.setAttribute("aria-selected", String(other === option));
    if (option) {
      field.setAttribute("aria-activedescendant", option.id);
      option.scrollIntoView({ block: "nearest" });
    } else {
      field.removeAttribute("aria-activedescendant");
    }
  };

  const settle = (field) => {
    const { list, options } = parts(field);
    field.setAttribute("aria-expanded", String(options.length > 0));
    if (list) field.setAttribute("aria-controls", list.id);
    else field.removeAttribute("aria-controls");
    field.removeAttribute("aria-activedescendant");
  };

  const close = (field) => {
    field.form.querySelector("[data-matches]").replaceChildren();
    settle(field);
  };

  const onKey = (event) => {
    const field = event.currentTarget;
    if (event.isComposing || event.ctrlKey || event.metaKey || event.altKey) return;
    const { options } = parts(field);
    if (options.length === 0) return;
    const at = options.indexOf(chosen(field));
    if (event.key === "ArrowDown" || event.key === "ArrowUp") {
      // One step past either end is the field itself, as it was typed.
      const step = event.key === "ArrowDown" ? 1 : -1;
      const next = at === -1 && step === -1 ? options.length - 1 : at + step;
      choose(field, options[next] ?? null);
    } else if (event.key === "Enter" && at !== -1) {
      window.location.assign(options[at].dataset.url);
    } else if (event.key === "Escape") {
      close(field);
    } else {
      return;
    }
    event.preventDefault();
    event.stopPropagation();
  };

  for (const field of document.querySelectorAll("[data-scan][hx-get]")) {
    field.setAttribute("role", "combobox");
    field.setAttribute("aria-autocomplete", "list");
    field.setAttribute("aria-haspopup", "listbox");
    settle(field);
    field.addEventListener("keydown", onKey);
    const box = field.form.querySelector("[data-matches]");
    new MutationObserver(() => settle(field)).observe(box, { childList: true });
    // A press, not a click: the field keeps the focus, so the list doesn't leave with it.
    box.addEventListener("mousedown", (event) => event.preventDefault());
    box.addEventListener("click", (event) => {
      const option = event.target.closest('[role="option"]');
      if (option) window.location.assign(option.dataset.url);
    });
  }
})();
