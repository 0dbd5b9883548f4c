"use strict";
// Moves groups, rays and readings along the movement curve. Without it the page shows one state.
for (const stage of document.querySelectorAll(".stage")) {
  const frames = JSON.parse(stage.querySelector("script").textContent);
  const slider = stage.querySelector("input");
  const groups = stage.querySelectorAll("[data-group]");
  const rays = stage.querySelectorAll("[data-ray]");
  const readings = stage.querySelectorAll("[data-reading]");
  const show = () => {
    const frame = frames[Number(slider.value)];
    groups.forEach((group, k) => group.setAttribute("transform", `translate(${frame.shift[k]} 0)`));
    rays.forEach((ray, k) => ray.setAttribute("points", frame.rays[k] || ""));
    readings.forEach((reading, k) => { reading.textContent = frame.readings[k]; });
    slider.setAttribute("aria-valuetext", frame.readings[0]);
  };
  slider.addEventListener("input", show);
  for (const button of stage.querySelectorAll("button")) {
    button.addEventListener("click", () => { slider.value = button.dataset.frame; show(); });
  }
  stage.querySelector(".controls").hidden = false;
  show();
}
