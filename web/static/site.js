// Small conveniences over pages that work without them. Nothing here holds state: the URL does.
"use strict";

// One open part of the sentence at a time; Escape closes it and gives the focus back to its words.
const parts = [...document.querySelectorAll("details.part")];
for (const part of parts) {
  part.addEventListener("toggle", () => {
    if (!part.open) return;
    for (const other of parts) if (other !== part) other.open = false;
    const panel = part.querySelector(".panel");
    panel.classList.remove("to-left");
    if (panel.getBoundingClientRect().right > document.documentElement.clientWidth - 8) panel.classList.add("to-left");
    const field = panel.querySelector("[aria-invalid='true']") || panel.querySelector("input:not([type=hidden]), select");
    if (field && !document.body.dataset.loading) field.focus();
  });
  part.addEventListener("keydown", (event) => {
    if (event.key === "Escape" && part.open) {
      part.open = false;
      part.querySelector("summary").focus();
    }
  });
}
document.addEventListener("click", (event) => {
  for (const part of parts) if (part.open && !part.contains(event.target)) part.open = false;
});

// A table wider than the window says that it goes on.
const frames = [...document.querySelectorAll(".table-frame.tall")].map((frame) => {
  const note = document.createElement("p");
  note.className = "small soft goes-on";
  note.textContent = "The table goes on to the right: scroll it sideways, or choose fewer columns.";
  if (!document.getElementById("column-choice")) note.textContent = "The table goes on to the right: scroll it sideways.";
  frame.before(note);
  return { frame, note };
});
const tellWide = () => { for (const { frame, note } of frames) note.hidden = frame.scrollWidth <= frame.clientWidth + 1; };
tellWide();
window.addEventListener("resize", tellWide);

// Empty fields stay out of the address.
for (const form of document.querySelectorAll("form[method=get]")) {
  form.addEventListener("submit", () => {
    for (const field of form.elements) if (field.name && field.value === "") field.disabled = true;
    setTimeout(() => { for (const field of form.elements) field.disabled = false; }, 0);
  });
}

// Narrow the list of columns while typing.
for (const box of document.querySelectorAll("input[data-narrows]")) {
  const target = document.getElementById(box.dataset.narrows);
  box.closest(".field").hidden = false;
  box.addEventListener("input", () => {
    const words = box.value.toLowerCase();
    for (const line of target.querySelectorAll(".check")) line.hidden = !line.textContent.toLowerCase().includes(words);
    for (const group of target.querySelectorAll("fieldset")) group.hidden = !group.querySelector(".check:not([hidden])");
  });
}

// A link to a place inside something folded unfolds it (browsers that do so by themselves find it open).
function unfold() {
  const place = location.hash.length > 1 && document.getElementById(decodeURIComponent(location.hash.slice(1)));
  if (!place) return;
  let folded = false;
  for (let part = place.closest("details"); part; part = part.parentElement.closest("details")) {
    folded = folded || !part.open;
    part.open = true;
  }
  if (folded) place.scrollIntoView();
}
addEventListener("hashchange", unfold);
unfold();
