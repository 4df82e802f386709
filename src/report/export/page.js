"use strict";
(() => {
  const table = document.getElementById("states");
  const body = table.tBodies[0];
  const rows = Array.from(body.rows);
  const key = (row, column) => {
    const text = row.cells[column].textContent.trim();
    const number = Number(text);
    return text === "" ? null : Number.isNaN(number) ? text : number;
  };
  const compare = (a, b) => {
    if (a === null || b === null) return (a === null) - (b === null);
    if (typeof a === "number" && typeof b === "number") return a - b;
    return String(a).localeCompare(String(b), "en", { numeric: true });
  };
  Array.from(table.tHead.rows[0].cells).forEach((head, column) => {
    const button = document.createElement("button");
    button.type = "button";
    button.append(...head.childNodes);
    head.append(button);
    button.addEventListener("click", () => {
      const direction = head.getAttribute("aria-sort") === "ascending" ? -1 : 1;
      for (const other of table.tHead.rows[0].cells) other.removeAttribute("aria-sort");
      head.setAttribute("aria-sort", direction === 1 ? "ascending" : "descending");
      rows
        .map((row, index) => ({ row, index, key: key(row, column) }))
        .sort((a, b) => {
          if (a.key === null || b.key === null) return compare(a.key, b.key) || a.index - b.index;
          return direction * compare(a.key, b.key) || a.index - b.index;
        })
        .forEach(({ row }) => body.append(row));
    });
  });
  const field = (name) => document.getElementById(name);
  const filter = () => {
    const words = field("search").value.toLowerCase().split(/\s+/).filter(Boolean);
    const exact = [[0, "length"], [1, "magnons"], [3, "parity"]];
    let shown = 0;
    for (const row of rows) {
      const text = row.textContent.toLowerCase();
      const fits = words.every((word) => text.includes(word))
        && exact.every(([column, name]) => field(name).value === "" || row.cells[column].textContent === field(name).value);
      row.hidden = !fits;
      shown += fits;
    }
    field("count").textContent = shown + " of " + rows.length + " states";
  };
  for (const name of ["search", "length", "magnons", "parity"]) field(name).addEventListener("input", filter);
  field("controls").addEventListener("submit", (event) => event.preventDefault());
  field("controls").hidden = false;
  filter();
  const open = () => {
    const target = document.getElementById(decodeURIComponent(location.hash.slice(1)));
    if (target instanceof HTMLDetailsElement) {
      target.open = true;
      target.scrollIntoView();
    }
  };
  addEventListener("hashchange", open);
  open();
})();
