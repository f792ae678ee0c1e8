"use strict";
// A cell counts as a number only where all of it is one: a date or a range sorts as text.
const number = (text) => {
  const plain = text.replace(/^[<>≤≥≈~]\s*/, "").replace("−", "-");
  return plain === "" ? NaN : Number(plain);
};
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
        const x = number(key(a)), y = number(key(b));
        const words = Number(Number.isNaN(x)) - Number(Number.isNaN(y));
        const order = words || (Number.isNaN(x)
          ? key(a).localeCompare(key(b), undefined, { numeric: true }) : x - y);
        return down ? -order : order;
      });
      body.append(...rows);
    });
  });
}
