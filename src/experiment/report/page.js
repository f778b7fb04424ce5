"use strict";
(() => {
  const byId = (id) => document.getElementById(id);
  const data = JSON.parse(byId("data").textContent);
  const say = (text) => { byId("said").textContent = text; };
  const make = (tag, text, attributes = {}) => {
    const node = document.createElement(tag);
    if (text !== null) node.textContent = text;
    for (const [name, value] of Object.entries(attributes)) node.setAttribute(name, value);
    return node;
  };

  // What cannot be compared goes last, whichever way round.
  const compare = (a, b, down) => {
    const none = (x) => x === null || x === undefined || x === "" || Number.isNaN(x);
    if (none(a) || none(b)) return none(a) - none(b);
    const order = typeof a === "number" && typeof b === "number" ? a - b : String(a).localeCompare(String(b), "en", { numeric: true });
    return down ? -order : order;
  };

  // A heading that sorts: `sort(down)` is called, and the state told on the heading and aloud.
  const sortable = (heading, name, sort) => {
    const button = make("button", name, { type: "button" });
    heading.replaceChildren(button);
    button.addEventListener("click", () => {
      const down = heading.getAttribute("aria-sort") === "ascending";
      for (const other of heading.parentNode.children) other.removeAttribute("aria-sort");
      heading.setAttribute("aria-sort", down ? "descending" : "ascending");
      sort(down);
      say(`Sorted by ${name}, ${down ? "descending" : "ascending"}`);
    });
  };

  for (const table of document.querySelectorAll("table.sorts")) {
    const body = table.tBodies[0];
    [...table.tHead.rows[0].cells].forEach((heading, column) => {
      const numeric = heading.classList.contains("num");
      const key = (row) => {
        const cell = row.cells[column];
        if (!numeric) return cell.textContent;
        return cell.dataset.v === undefined ? null : Number(cell.dataset.v);
      };
      sortable(heading, heading.textContent, (down) => {
        const rows = [...body.rows].map((row) => [key(row), row]);
        rows.sort((a, b) => compare(a[0], b[0], down));
        body.append(...rows.map((pair) => pair[1]));
      });
    });
  }

  // Columns of a run as they stand in the data.
  const run = (row) => ({
    problem: data.problems[row[0]], n: row[1], contender: data.contenders[row[2]], start: row[3], repetition: row[4],
    ending: data.notes[row[5]].replaceAll("_", " "), note: data.notes[row[6]], moves: row[7], values: row[8], gradients: row[9],
    both: row[10], calls: row[8] + row[9] + row[10], tooLong: row[11], tooShort: row[12], outside: row[13], startValue: row[14],
    value: row[15], gradient: row[16], digits: row[17], seconds: row[18], trials: row[19],
  });
  const number = (x) => {
    if (x === null) return "\u2013";
    if (typeof x !== "number") return x === "inf" ? "infinite" : "minus infinite";
    if (x === 0) return "0";
    const size = Math.abs(x);
    return size < 1e-3 || size >= 1e5 ? x.toExponential(3) : String(Number(x.toPrecision(5)));
  };
  const whole = (x) => x.toLocaleString("en");
  const columns = [
    ["problem", (r) => r.problem, String], ["n", (r) => r.n, whole, true], ["contender", (r) => r.contender, String],
    ["start", (r) => r.start, String, true], ["ending", (r) => r.ending, String], ["moves", (r) => r.moves, whole, true],
    ["calls", (r) => r.calls, whole, true], ["too long", (r) => r.tooLong, whole, true], ["too short", (r) => r.tooShort, whole, true],
    ["value", (r) => r.value, number, true], ["max |g|", (r) => r.gradient, number, true], ["digits", (r) => r.digits, number, true],
    ["seconds", (r) => r.seconds, number, true],
  ];
  const PAGE = 50;
  const all = data.runs.map(run);
  let shown = all, page = 0;
  const table = byId("run-table"), body = table.tBodies[0];

  const draw = () => {
    const from = page * PAGE, rows = shown.slice(from, from + PAGE);
    body.replaceChildren(...rows.map((one) => {
      const line = make("tr", null);
      const label = `${one.trials === null ? "Show" : "Show trials"}: the run of ${one.contender} on ${one.problem}, start ${one.start}, repetition ${one.repetition}`;
      const button = make("button", one.trials === null ? "Show" : "Show trials", { type: "button", "aria-label": label });
      button.addEventListener("click", () => open(one, button));
      line.append(make("td", null));
      line.firstChild.append(button);
      columns.forEach(([, key, text, numeric], column) => {
        const cell = make(column === 0 ? "th" : "td", text(key(one)), numeric ? { class: "num" } : {});
        if (column === 0) cell.setAttribute("scope", "row");
        line.append(cell);
      });
      return line;
    }));
    const last = Math.min(from + PAGE, shown.length);
    byId("count").textContent = shown.length ? `${whole(from + 1)} to ${whole(last)} of ${whole(shown.length)}` : "no run";
    byId("before").disabled = page === 0;
    byId("after").disabled = last >= shown.length;
  };

  const headings = make("tr", null);
  headings.append(make("th", "run", { scope: "col" }));
  columns.forEach(([name, key, , numeric]) => {
    const heading = make("th", null, numeric ? { scope: "col", class: "num" } : { scope: "col" });
    headings.append(heading);
    sortable(heading, name, (down) => {
      shown = [...shown].sort((a, b) => compare(key(a), key(b), down));
      page = 0;
      draw();
    });
  });
  table.tHead.append(headings);

  byId("filter").addEventListener("input", (event) => {
    const words = event.target.value.toLowerCase().split(/\s+/).filter(Boolean);
    const text = (r) => `${r.problem} ${r.contender} ${r.ending} ${r.note}`.toLowerCase();
    shown = all.filter((one) => words.every((word) => text(one).includes(word)));
    for (const heading of headings.children) heading.removeAttribute("aria-sort");
    page = 0;
    draw();
    say(`${shown.length} runs`);
  });
  byId("before").addEventListener("click", () => { page -= 1; draw(); });
  byId("after").addEventListener("click", () => { page += 1; draw(); });

  // One run: all its numbers, and its searches where a trial log was given.
  const open = (one, from) => {
    const box = byId("one");
    const heading = make("h3", `${one.contender} on ${one.problem} (n = ${whole(one.n)})`, { tabindex: "-1" });
    const close = make("button", "Close", { type: "button" });
    const shut = () => { box.hidden = true; (from.isConnected ? from : byId("filter")).focus(); };
    close.addEventListener("click", shut);
    box.onkeydown = (event) => { if (event.key === "Escape") shut(); };
    const list = make("dl", null);
    const facts = [
      ["ending", one.note.startsWith(one.ending) ? one.note : `${one.ending}: ${one.note}`], ["start, repetition", `${one.start}, ${one.repetition}`], ["moves", whole(one.moves)],
      ["calls", `${whole(one.calls)}: ${whole(one.values)} values, ${whole(one.gradients)} gradients, ${whole(one.both)} both at once`],
      ["refused trials", `${whole(one.tooLong)} too long, ${whole(one.tooShort)} too short, ${whole(one.outside)} outside of the domain`],
      ["value", `${number(one.startValue)} at the start, ${number(one.value)} at the end`], ["max |g|", number(one.gradient)],
      ["correct digits", number(one.digits)], ["seconds", number(one.seconds)],
    ];
    for (const [name, text] of facts) list.append(make("dt", name), make("dd", text));
    box.replaceChildren(heading, list);
    if (one.trials === null) box.append(make("p", "No trial log of this run was given to the report.", { class: "muted" }));
    else box.append(...searches(one));
    box.append(close);
    box.hidden = false;
    heading.focus();
  };

  const searches = (one) => {
    const found = [...document.querySelectorAll(`template[data-run="${one.trials}"]`)];
    if (found.length === 0) return [make("p", "The trials of this run were left out to keep the file small.", { class: "muted" })];
    const room = make("div", null, { id: "search" });
    const choice = make("select", null);
    found.forEach((template, at) => choice.append(make("option", `${at + 1} (${template.dataset.trials} trials)`, { value: at })));
    const show = () => room.replaceChildren(found[choice.value].content.cloneNode(true));
    choice.addEventListener("change", show);
    show();
    const label = make("label", "Search ");
    label.append(choice);
    const more = Number(found[0].dataset.all) - found.length;
    const parts = [label, room];
    if (more > 0) parts.push(make("p", `${whole(more)} later searches left out.`, { class: "muted" }));
    return parts;
  };

  const theme = byId("theme");
  theme.hidden = false;
  theme.addEventListener("click", () => {
    const root = document.documentElement;
    const dark = root.dataset.theme ? root.dataset.theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
    root.dataset.theme = dark ? "light" : "dark";
    say(`${root.dataset.theme} colours`);
  });
  byId("tools").hidden = false;
  byId("pages").hidden = all.length <= PAGE;
  draw();
})();
