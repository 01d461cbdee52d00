// Work under way: ask how far it is; when it ends, the page is loaded again and shows the outcome. Without this script
// the page loads itself again by and by.
"use strict";

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
