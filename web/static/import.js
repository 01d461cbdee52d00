// The import page: dropping files. Without this script the page works by plain forms.
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
