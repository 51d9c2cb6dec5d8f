"use strict";
(() => {
  const table = document.querySelector("table");
  const body = table.tBodies[0];
  const rows = [...body.rows];
  const tools = document.querySelector(".tools");
  const [text, status] = tools.querySelectorAll("input, select");
  const said = document.getElementById("said");
  tools.hidden = false;
  const filter = () => {
    const wanted = text.value.trim().toLowerCase();
    let shown = 0;
    for (const row of rows) {
      const fits = row.textContent.toLowerCase().includes(wanted) && (!status.value || row.dataset.status === status.value);
      row.hidden = !fits;
      shown += fits;
    }
    said.textContent = `${shown} of ${rows.length} shown`;
  };
  text.addEventListener("input", filter);
  status.addEventListener("input", filter);
  [...table.tHead.rows[0].cells].forEach((head, column) => {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = head.textContent;
    head.replaceChildren(button);
    button.addEventListener("click", () => {
      const down = head.getAttribute("aria-sort") === "ascending";
      for (const other of table.tHead.rows[0].cells) other.removeAttribute("aria-sort");
      head.setAttribute("aria-sort", down ? "descending" : "ascending");
      const key = (row) => row.cells[column].dataset.key ?? row.cells[column].textContent.trim();
      const order = (a, b) => key(a).localeCompare(key(b), "en", { numeric: true });
      body.append(...[...rows].sort((a, b) => (down ? order(b, a) : order(a, b))));
    });
  });
  filter();
})();
