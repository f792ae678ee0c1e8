"use strict";
for (const table of document.querySelectorAll("table.data")) {
  const body = table.tBodies[0];
  table.querySelectorAll("thead th").forEach((head, column) => {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = head.textContent;
    head.replaceChildren(button);
    button.addEventListener("click", () => {
      const down = head.getAttribute("aria-sort") === "ascending";
      table.querySelectorAll("thead th").forEach((h) => h.removeAttribute("aria-sort"));
      head.setAttribute("aria-sort", down ? "descending" : "ascending");
      const key = (row) => row.cells[column].textContent.trim();
      const rows = [...body.rows].sort((a, b) => {
        const x = parseFloat(key(a)), y = parseFloat(key(b));
        const order = Number.isNaN(x) || Number.isNaN(y)
          ? key(a).localeCompare(key(b)) : x - y;
        return down ? -order : order;
      });
      body.append(...rows);
    });
  });
}
