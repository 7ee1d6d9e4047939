"use strict";
(() => {
  const table = document.getElementById("list");
  const body = table.tBodies[0];
  const form = document.querySelector(".filters");
  const shown = document.getElementById("shown");
  const [text, species, status, low, high] =
    ["f-text", "f-species", "f-status", "f-low", "f-high"].map((id) => document.getElementById(id));

  // What a row is sorted and filtered by: its cells, and the numbers behind two of them.
  const rows = Array.from(body.rows, (row, order) => {
    const cells = Array.from(row.cells, (cell) => cell.textContent);
    const [t, n] = row.dataset.v.split(" ").map((number) => (number === "" ? NaN : Number(number)));
    const number = (cell) => (cell === "" ? NaN : parseFloat(cell));
    return {
      row, order, t, species: cells[1], status: cells[7], search: (cells[0] + " " + cells[8]).toLowerCase(),
      keys: [cells[0], cells[1], t, n, number(cells[4]), number(cells[5]), number(cells[6]), cells[7], cells[8]],
    };
  });

  // Only some of the rows that fit are in the document: the browser lays out what is looked at, and a filter or
  // a new order costs the same for a hundred rows as for thousands. The rest follows on scrolling, and for print.
  const portion = 60;
  const view = table.parentElement;
  let fitting = rows;
  let drawn = 0;
  const draw = (count) => {
    const more = document.createDocumentFragment();
    for (; drawn < Math.min(count, fitting.length); drawn += 1) more.append(fitting[drawn].row);
    body.append(more);
  };
  const redraw = () => {
    body.replaceChildren();
    drawn = 0;
    view.scrollTop = 0;
    draw(portion);
  };
  view.addEventListener("scroll", () => {
    if (view.scrollTop + 2 * view.clientHeight > view.scrollHeight) draw(drawn + portion);
  }, { passive: true });
  // Whoever goes down the rows by keyboard finds them go on.
  body.addEventListener("focusin", (event) => {
    if (event.target.closest("tr") === body.lastElementChild) draw(drawn + portion);
  });
  addEventListener("beforeprint", () => draw(fitting.length));

  const filter = () => {
    const wanted = text.value.trim().toLowerCase();
    const least = low.value === "" ? -Infinity : Number(low.value);
    const most = high.value === "" ? Infinity : Number(high.value);
    const bounded = low.value !== "" || high.value !== "";
    fitting = rows.filter((item) => (!species.value || item.species === species.value) &&
      (!status.value || item.status === status.value) && (!wanted || item.search.includes(wanted)) &&
      (!bounded || (item.t >= least && item.t <= most)));
    redraw();
    shown.textContent = fitting.length === rows.length ? `${rows.length} rows` : `${fitting.length} of ${rows.length} rows`;
  };

  const collator = new Intl.Collator("en", { numeric: true });
  const compare = (a, b) => {
    if (typeof a === "string") return collator.compare(a, b);
    if (Number.isNaN(a) || Number.isNaN(b)) return Number.isNaN(a) - Number.isNaN(b);
    return a - b;
  };

  const sort = (heading, key) => {
    const down = heading.getAttribute("aria-sort") === "ascending";
    for (const other of table.tHead.rows[0].cells) other.removeAttribute("aria-sort");
    heading.setAttribute("aria-sort", down ? "descending" : "ascending");
    const sign = down ? -1 : 1;
    rows.sort((a, b) => {
      const x = a.keys[key];
      const y = b.keys[key];
      // What is not known stands last in either direction.
      if (Number.isNaN(x) || Number.isNaN(y)) return compare(x, y) || a.order - b.order;
      return sign * compare(x, y) || a.order - b.order;
    });
    filter();
  };

  for (const heading of table.tHead.rows[0].cells) {
    const button = document.createElement("button");
    button.type = "button";
    button.append(...heading.childNodes);
    heading.append(button);
    button.addEventListener("click", () => sort(heading, Number(heading.dataset.k)));
  }
  form.addEventListener("input", filter);
  form.addEventListener("submit", (event) => event.preventDefault());
  form.addEventListener("reset", () => requestAnimationFrame(filter));
  form.hidden = false;
  filter();
})();
