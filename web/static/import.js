// The import page: dropping files, and progress by itself. Without this script the page works by plain forms.
"use strict";

const MEGABYTE = 1024 * 1024;

// Files dropped on the page stand in the field as if they had been chosen.
for (const form of document.querySelectorAll("form.upload")) {
  const place = form.querySelector("[data-drop]");
  const field = form.querySelector("input[type=file]");
  const list = form.querySelector("[data-chosen]");
  const fault = form.querySelector("[data-fault]");
  const limit = Number(form.dataset.limit);
  form.querySelector(".drop-hint").hidden = false;

  const show = () => {
    const files = [...field.files];
    list.replaceChildren(...files.map((file) => {
      const line = document.createElement("li");
      line.textContent = `${file.name}, ${(file.size / MEGABYTE).toFixed(file.size < MEGABYTE ? 2 : 1)} MB`;
      return line;
    }));
    list.hidden = files.length === 0;
    const size = files.reduce((sum, file) => sum + file.size, 0);
    fault.hidden = size <= limit;
    fault.textContent = size > limit ? `These files are ${Math.round(size / MEGABYTE)} MB together; at most ${limit / MEGABYTE} MB are taken at once.` : "";
    form.querySelector("button[type=submit]").disabled = size > limit;
  };
  field.addEventListener("change", show);
  for (const kind of ["dragenter", "dragover"]) {
    place.addEventListener(kind, (event) => { event.preventDefault(); place.classList.add("over"); });
  }
  for (const kind of ["dragleave", "drop"]) place.addEventListener(kind, () => place.classList.remove("over"));
  place.addEventListener("drop", (event) => {
    event.preventDefault();
    if (event.dataTransfer.files.length) field.files = event.dataTransfer.files;
    show();
  });
  form.addEventListener("submit", () => {
    form.querySelector("[data-sending]").hidden = false;
    form.querySelector("button[type=submit]").disabled = true;
  });
  window.addEventListener("pageshow", () => {
    form.querySelector("[data-sending]").hidden = true;
    show();
  });
}

// A draft under way: ask how far it is; when it ends, the page is loaded again and shows the outcome.
for (const part of document.querySelectorAll("[data-progress]")) {
  const words = part.querySelector("[data-words]");
  const bar = part.querySelector("progress");
  const ask = async () => {
    try {
      const answer = await fetch(part.dataset.progress, { headers: { Accept: "application/json" } });
      const state = await answer.json();
      if (!answer.ok || !state.under_way) {
        window.location.reload();
        return;
      }
      if (state.sentence && words.textContent !== state.sentence) words.textContent = state.sentence;
      if (state.total) {
        bar.max = state.total;
        bar.value = state.done;
      } else {
        bar.removeAttribute("value");
      }
    } catch {
      words.textContent = "The program that serves this page does not answer. The page asks again.";
    }
    setTimeout(ask, 700);
  };
  setTimeout(ask, 300);
}
