// Over diagrams that stand without it: the sample nearest to the pointer is named, a drawn box becomes the ends of the axes.
"use strict";

const plot = document.getElementById("plot");
const readout = document.getElementById("readout");

if (plot && readout) {
  const points = [...plot.querySelectorAll(".points a")].map((link) => {
    const use = link.querySelector("use");
    return { link, left: parseFloat(use.getAttribute("x")) / 100, top: parseFloat(use.getAttribute("y")) / 100 };
  });
  const REACH = 14;
  const place = (event) => {
    const frame = plot.getBoundingClientRect();
    return { x: (event.clientX - frame.left) / frame.width, y: (event.clientY - frame.top) / frame.height, frame };
  };
  const nearest = ({ x, y, frame }) => {
    let found = null, least = REACH * REACH;
    for (const point of points) {
      const across = (point.left - x) * frame.width, down = (point.top - y) * frame.height;
      const apart = across * across + down * down;
      if (apart <= least) { least = apart; found = point; }
    }
    return found;
  };
  if (points.length) {
    readout.hidden = false;
    readout.textContent = "Point at a symbol to read it; it leads to the sample.";
    // The line below says it at once, so the browser's own late note would say it twice.
    for (const { link } of points) {
      const title = link.querySelector("title");
      link.dataset.says = title.textContent.split("\n").join("; ");
      title.remove();
    }
  }

  // A box is drawn with the mouse alone: a finger scrolls the page.
  const box = document.getElementById("box");
  document.getElementById("box-hint")?.removeAttribute("hidden");
  let start = null;
  const number = (ends, part, log) => {
    const [low, high] = ends.map((end) => (log ? Math.log10(end) : end));
    const value = low + part * (high - low);
    return String(Number((log ? 10 ** value : value).toPrecision(Number(plot.dataset.digits || 4))));
  };
  const clamp = (part) => Math.min(1, Math.max(0, part));
  const corners = (end) => ({
    left: Math.min(start.x, end.x), right: Math.max(start.x, end.x),
    top: Math.min(start.y, end.y), bottom: Math.max(start.y, end.y),
  });
  let moved = false;
  plot.addEventListener("pointermove", (event) => {
    const here = place(event);
    if (start) {
      const end = { x: clamp(here.x), y: clamp(here.y) };
      const { left, right, top, bottom } = corners(end);
      moved = moved || Math.hypot((right - left) * here.frame.width, (bottom - top) * here.frame.height) > 6;
      if (moved) {
        box.setAttribute("x", `${100 * left}%`);
        box.setAttribute("y", `${100 * top}%`);
        box.setAttribute("width", `${100 * (right - left)}%`);
        box.setAttribute("height", `${100 * (bottom - top)}%`);
      }
      return;
    }
    const point = nearest(here);
    if (point) readout.textContent = point.link.dataset.says;
    plot.classList.toggle("near", Boolean(point));
  });
  if (plot.dataset.x) {
    plot.addEventListener("pointerdown", (event) => {
      if (event.pointerType !== "mouse" || event.button !== 0) return;
      const here = place(event);
      if (here.x < 0 || here.x > 1 || here.y < 0 || here.y > 1) return;
      start = here;
      moved = false;
      event.preventDefault();
    });
    window.addEventListener("pointerup", (event) => {
      if (!start) return;
      const here = place(event);
      const { left, right, top, bottom } = corners({ x: clamp(here.x), y: clamp(here.y) });
      const drawn = moved && (right - left) * here.frame.width > 8 && (bottom - top) * here.frame.height > 8;
      start = null;
      if (!drawn) {
        box.setAttribute("width", "0");
        return;
      }
      const ends = (name) => plot.dataset[name].split(" ").map(Number);
      const address = new URL(window.location.href);
      const set = (name, value) => address.searchParams.set(name, value);
      address.searchParams.delete("whole");
      if (plot.dataset.grid) set("grid", plot.dataset.grid);
      set("x_from", number(ends("x"), left, plot.dataset.log.includes("x")));
      set("x_to", number(ends("x"), right, plot.dataset.log.includes("x")));
      set("y_from", number(ends("y"), 1 - bottom, plot.dataset.log.includes("y")));
      set("y_to", number(ends("y"), 1 - top, plot.dataset.log.includes("y")));
      window.location.assign(address);
    });
    window.addEventListener("keydown", (event) => {
      if (event.key === "Escape" && start) {
        start = null;
        box.setAttribute("width", "0");
      }
    });
  }
  plot.addEventListener("dragstart", (event) => event.preventDefault());
  plot.addEventListener("click", (event) => {
    if (moved) {
      event.preventDefault();
      moved = false;
      return;
    }
    if (event.target.closest("a")) return;
    const point = nearest(place(event));
    if (point) window.location.assign(point.link.href.baseVal);
  });
}
