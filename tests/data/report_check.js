// Put into a report by tests/report_browser.rs. Uses the page as a person would, computes contrasts, and writes what it found
// into the title, one line a check: "ok ..." or "FAILED ...".
"use strict";
const lines = [];
const check = (holds, what) => lines.push(`${holds ? "ok" : "FAILED"} ${what}`);
const all = (selector, root = document) => [...root.querySelectorAll(selector)];

// WCAG 2.2: relative luminance and contrast ratio.
const rgb = (text) => { const [r, g, b, a = 1] = text.match(/[\d.]+/g).map(Number); return { r, g, b, a }; };
const luminance = ({ r, g, b }) => {
  const part = (c) => { c /= 255; return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4; };
  return 0.2126 * part(r) + 0.7152 * part(g) + 0.0722 * part(b);
};
const contrast = (a, b) => { const [x, y] = [luminance(a), luminance(b)].sort((p, q) => q - p); return (x + 0.05) / (y + 0.05); };
const behind = (node) => {
  for (let at = node; at; at = at.parentElement) {
    const colour = rgb(getComputedStyle(at).backgroundColor);
    if (colour.a === 1) return colour;
  }
  return { r: 255, g: 255, b: 255 };
};
const visible = (node) => node.getClientRects().length > 0 && !node.closest(".unseen");

const contrasts = (theme) => {
  const low = [];
  for (const node of all("body *")) {
    const own = [...node.childNodes].some((child) => child.nodeType === 3 && child.textContent.trim());
    if (!own || !visible(node) || node.closest("svg") || node.closest("script, style, template")) continue;
    const ratio = contrast(rgb(getComputedStyle(node).color), behind(node));
    if (!(ratio >= 4.5)) low.push(`${node.tagName} "${node.textContent.slice(0, 20)}" ${ratio.toFixed(2)}`);
  }
  check(low.length === 0, `${theme}: text stands out by 4.5 to 1; ${low.slice(0, 3)}`);
  const faint = [];
  const paper = behind(document.body);
  for (const node of all("svg .ink, svg .rule, svg [class*='s']:not(.grid):not(.halo), svg circle, svg polygon")) {
    if (!visible(node)) continue;
    const style = getComputedStyle(node);
    // Text and filled marks by their fill, lines by their stroke.
    const text = node.classList.contains("ink");
    const paint = text || (style.stroke === "none" || node.classList.contains("halo")) ? style.fill : style.stroke;
    if (paint === "none" || node.classList.contains("paper")) continue;
    const ratio = contrast(rgb(paint), paper);
    if (!(ratio >= (text ? 4.5 : 3))) faint.push(`${node.tagName}.${node.getAttribute("class")} ${paint} ${ratio.toFixed(2)}`);
  }
  check(faint.length === 0, `${theme}: text and marks of pictures stand out; ${[...new Set(faint)].slice(0, 4)}`);
};

const labels = () => {
  const nameless = all("button, input, select, a, [tabindex='0'], svg[role='img']").filter((node) => {
    const name = node.getAttribute("aria-label") || node.textContent.trim() || (node.labels && node.labels.length && node.labels[0].textContent.trim());
    return !name;
  });
  check(nameless.length === 0, `everything that can be reached has a name; ${nameless.map((n) => n.outerHTML.slice(0, 60))}`);
  check(document.documentElement.lang === "en" && document.title, "language and title");
  const ids = all("[id]").map((node) => node.id);
  check(new Set(ids).size === ids.length, "no id stands twice");
  check(all("table").every((table) => table.caption && all("thead th", table).every((th) => th.scope === "col")), "tables have captions and headings");
  const levels = all("h1, h2, h3").map((node) => Number(node.tagName[1]));
  check(levels[0] === 1 && levels.every((level, i) => i === 0 || level <= levels[i - 1] + 1), "headings do not skip a level");
  check(all("a[href^='#']").every((a) => document.getElementById(a.hash.slice(1))), "links inside of the page lead somewhere");
  check(all("[src], link, iframe, object, image").length === 0, "nothing is loaded");
  const small = all("button, input, select").filter(visible).filter((node) => node.getBoundingClientRect().height < 24);
  check(small.length === 0, `targets are 24 pixels high or more; ${small.map((n) => n.textContent)}`);
};

const sorting = () => {
  const table = document.querySelector("#run-table");
  const heading = all("thead th", table).find((th) => th.textContent === "calls");
  const column = [...heading.parentNode.children].indexOf(heading);
  const numbers = () => all("tbody tr", table).map((row) => Number(row.cells[column].textContent.replaceAll(",", "")));
  const sorted = (list, sign) => list.length > 5 && list.every((x, i) => i === 0 || sign * (x - list[i - 1]) >= 0);
  heading.querySelector("button").click();
  check(sorted(numbers(), 1) && heading.ariaSort === "ascending", "runs sort upwards by calls");
  heading.querySelector("button").click();
  check(sorted(numbers(), -1) && heading.ariaSort === "descending", "and downwards");
  check(document.querySelector("#said").textContent.includes("descending"), "which is said aloud");
  for (const other of all("table.sorts")) {
    const first = other.tHead.rows[0].cells[1];
    const before = all("tbody tr", other).length;
    first.querySelector("button").click();
    check(first.ariaSort === "ascending" && all("tbody tr", other).length === before, `${other.caption.textContent} sorts`);
  }
  const input = document.querySelector("#filter");
  const rows = () => all("tbody tr", table).length;
  input.value = "no such run anywhere";
  input.dispatchEvent(new Event("input"));
  check(rows() === 0, "the filter leaves nothing out of nothing");
  input.value = "";
  input.dispatchEvent(new Event("input"));
  check(rows() > 5, "and all without words");
};

const drilling = () => {
  const button = all("#run-table tbody button").find((node) => node.textContent === "Show trials");
  check(Boolean(button), "a run with trials stands on the first page");
  button.focus();
  check(document.activeElement === button, "its button can be reached by keyboard");
  button.click();
  const box = document.querySelector("#one");
  check(!box.hidden && box.querySelector("dl").textContent.includes("refused trials"), "the run opens");
  check(box.contains(document.activeElement), "and has the focus");
  check(Boolean(box.querySelector("svg")) && all("table tbody tr", box).length > 0, "with a picture and a table of trials");
  const choice = box.querySelector("select");
  const first = box.querySelector("svg").getAttribute("aria-label");
  choice.selectedIndex = choice.options.length - 1;
  choice.dispatchEvent(new Event("change"));
  check(choice.options.length > 1 && box.querySelector("svg").getAttribute("aria-label") !== first, "another search can be chosen");
};

const closing = () => {
  const box = document.querySelector("#one");
  box.dispatchEvent(new KeyboardEvent("keydown", { key: "Escape", bubbles: true }));
  check(box.hidden && document.activeElement.textContent === "Show trials", "Escape closes it and goes back");
};

const narrow = () => {
  const width = document.documentElement.clientWidth;
  const over = document.documentElement.scrollWidth;
  check(over <= width, `nothing is wider than the page at ${width} pixels (${over})`);
};

addEventListener("load", () => {
  try {
    sorting();
    labels();
    drilling();
    narrow();
    for (const theme of ["light", "dark"]) {
      document.documentElement.dataset.theme = theme;
      contrasts(theme);
    }
    const root = document.documentElement;
    document.querySelector("#theme").click();
    check(root.dataset.theme === "light", "the button changes the colours");
    closing();
  } catch (error) {
    check(false, `the check itself: ${error.message} ${error.stack}`);
  }
  for (const message of window.faults) check(false, `console: ${message}`);
  const box = document.createElement("pre");
  box.id = "checks";
  box.textContent = `${lines.join("\n")}\nend of checks`;
  document.body.append(box);
});
