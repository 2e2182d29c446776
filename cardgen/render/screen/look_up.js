"use strict";
/* Shows the cell of a table that stands at the chosen place. Reads the tables of this page and
   nothing else: what is not in a table cannot be chosen, and nothing lies between two rows. */
(function () {
  const form = document.getElementById("look-up");
  const pick = (name) => form.elements[name];
  const tables = Array.from(document.querySelectorAll("table"));
  const fill = (select, texts) => {
    const before = select.value;
    select.replaceChildren(...texts.map((text) => new Option(text, text)));
    if (texts.includes(before)) select.value = before;
  };
  const unique = (texts) => Array.from(new Set(texts));
  const cells = () => Array.from(tables[Number(pick("table").value)].querySelectorAll("td[data-rpm]"));
  const refill = () => {
    const all = cells();
    fill(pick("altitude"), unique(all.map((cell) => cell.dataset.altitude)));
    if (pick("temperature")) fill(pick("temperature"), unique(all.map((cell) => cell.dataset.temperature)));
    fill(pick("rpm"), unique(all.map((cell) => cell.dataset.rpm)));
    show();
  };
  const show = () => {
    const found = cells().find((cell) =>
      cell.dataset.altitude === pick("altitude").value &&
      cell.dataset.rpm === pick("rpm").value &&
      (!pick("temperature") || cell.dataset.temperature === pick("temperature").value));
    form.querySelector("output").textContent = found ? found.dataset.says : "Not in the table.";
  };
  pick("table").addEventListener("change", refill);
  for (const name of ["altitude", "temperature", "rpm"]) {
    if (pick(name)) pick(name).addEventListener("change", show);
  }
  form.addEventListener("submit", (event) => event.preventDefault());
  form.hidden = false;
  refill();
})();
