/** The filter of the index page: it hides what does not match; without script everything is shown. */
export const FILTER_SCRIPT = `
(() => {
  const form = document.getElementById("filters");
  if (!form) return;
  const status = document.getElementById("shown");
  const tiles = [...document.querySelectorAll(".tile")];
  const nights = [...document.querySelectorAll(".night")];
  const apply = () => {
    const { antenna, cause, verdict, from, to } = form.elements;
    let shown = 0;
    for (const tile of tiles) {
      const { antennas, rules, night } = tile.dataset;
      const fits =
        (antenna.value === "" || JSON.parse(antennas).includes(antenna.value)) &&
        (cause.value === "" || JSON.parse(rules).includes(cause.value)) &&
        (verdict.value === "" || tile.classList.contains(verdict.value)) &&
        (from.value === "" || night >= from.value) &&
        (to.value === "" || night <= to.value);
      tile.hidden = !fits;
      if (fits) shown += 1;
    }
    for (const night of nights) night.hidden = !night.querySelector(".tile:not([hidden])");
    status.textContent = shown + " of " + tiles.length + " datasets shown";
  };
  form.hidden = false;
  form.addEventListener("input", apply);
  form.addEventListener("reset", () => setTimeout(apply));
  form.addEventListener("submit", (event) => event.preventDefault());
  apply();
})();
`;
