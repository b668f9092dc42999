"use strict";
/* What is fetched while one types: says when it could not be, and takes it back when it can. */

(() => {
  const say = (sentence) => {
    const place = document.getElementById("live-trouble");
    if (place) place.textContent = sentence;
  };

  document.addEventListener("htmx:sendError", () =>
    say("No answer from the shop's computer. What you typed is still here; the button below still works once it answers."),
  );
  document.addEventListener("htmx:timeout", () =>
    say("The shop's computer took too long to answer. What you typed is still here; change a figure or press the button."),
  );
  document.addEventListener("htmx:responseError", (event) => {
    const status = event.detail.xhr.status;
    say(
      status === 401 || status === 403
        ? "You are signed out, or this is not open to your role. What you typed is still here; sign in in another tab and go on."
        : "This could not be worked out just now. What you typed is still here; press the button to see why.",
    );
  });
  document.addEventListener("htmx:afterOnLoad", (event) => {
    if (event.detail.xhr.status < 400) say("");
  });

  // A second press while the first is on its way asks for nothing new.
  document.addEventListener("submit", (event) => {
    const form = event.target;
    if (form.method !== "post" || event.defaultPrevented) return;
    if (form.dataset.sent) {
      event.preventDefault();
      return;
    }
    form.dataset.sent = "yes";
    setTimeout(() => delete form.dataset.sent, 4000);
  });
  window.addEventListener("pageshow", (event) => {
    if (!event.persisted) return;
    for (const form of document.querySelectorAll("form[data-sent]")) delete form.dataset.sent;
  });
})();
