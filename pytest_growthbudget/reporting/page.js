"use strict";
(() => {
  const table = document.getElementById("budgets");
  if (!table) return;
  const body = table.tBodies[0];
  const said = document.getElementById("said");
  const budgets = [...document.querySelectorAll("details.budget")];
  const show = (text) => { said.textContent = text; };

  const valueOf = (row, column) => {
    const cell = row.cells[column];
    return cell.dataset.sort !== undefined ? Number(cell.dataset.sort) : cell.textContent;
  };
  const compare = (a, b) =>
    typeof a === "number" ? (Number.isNaN(a) ? 1 : Number.isNaN(b) ? -1 : a - b) : a.localeCompare(b);

  [...table.tHead.rows[0].cells].forEach((heading, column) => {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = heading.textContent;
    heading.replaceChildren(button);
    button.addEventListener("click", () => {
      const order = heading.getAttribute("aria-sort") === "ascending" ? "descending" : "ascending";
      for (const other of table.tHead.rows[0].cells) other.removeAttribute("aria-sort");
      heading.setAttribute("aria-sort", order);
      const sign = order === "ascending" ? 1 : -1;
      const rows = [...body.rows].map((row) => [valueOf(row, column), row]);
      rows.sort((a, b) => {
        const unknown = Number.isNaN(a[0]) || Number.isNaN(b[0]);
        return (unknown ? 1 : sign) * compare(a[0], b[0]);
      });
      body.append(...rows.map((pair) => pair[1]));
      show(`Sorted by ${button.textContent}, ${order}.`);
    });
  });

  const verdict = document.getElementById("verdict");
  const words = document.getElementById("words");
  const filter = () => {
    const wanted = words.value.trim().toLowerCase();
    let count = 0;
    for (const row of body.rows) {
      const fits = (!verdict.value || row.dataset.verdict === verdict.value)
        && row.textContent.toLowerCase().includes(wanted);
      row.hidden = !fits;
      const key = row.querySelector("a").hash.slice(1);
      document.getElementById(key).closest("details").hidden = !fits;
      count += fits;
    }
    show(`${count} of ${body.rows.length} budgets shown.`);
  };
  verdict.addEventListener("change", filter);
  words.addEventListener("input", filter);
  document.querySelector("form.controls").addEventListener("submit", (event) => event.preventDefault());
  document.querySelector("form.controls").hidden = false;

  const setOpen = (open) => { for (const each of budgets) each.open = open; };
  document.getElementById("open-all").addEventListener("click", () => setOpen(true));
  document.getElementById("close-all").addEventListener("click", () => setOpen(false));

  const reveal = () => {
    const target = location.hash && document.getElementById(location.hash.slice(1));
    const details = target && target.closest("details");
    if (!details) return;
    details.open = true;
    details.querySelector("summary").focus({ preventScroll: true });
    details.scrollIntoView();
  };
  addEventListener("hashchange", reveal);
  table.addEventListener("click", (event) => {
    if (event.target.closest("a[href='" + location.hash + "']")) reveal();
  });
  reveal();

  let before = [];
  addEventListener("beforeprint", () => { before = budgets.map((each) => each.open); setOpen(true); });
  addEventListener("afterprint", () => budgets.forEach((each, index) => { each.open = before[index]; }));
})();
