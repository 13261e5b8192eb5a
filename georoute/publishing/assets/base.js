// Small tools shared by the pages. Text of users reaches the page by textContent only.
const data = JSON.parse(document.getElementById("plan-data").textContent);
const words = data.words;
const SVG_SPACE = "http://www.w3.org/2000/svg";

function fill(text, values) {
  return text.replace(/\{(\w+)\}/g, (whole, key) => (key in values ? String(values[key]) : whole));
}

function html(tag, classes, text) {
  const element = document.createElement(tag);
  if (classes) element.className = classes;
  if (text !== undefined) element.textContent = text;
  return element;
}

function svg(tag, attributes, text) {
  const element = document.createElementNS(SVG_SPACE, tag);
  for (const [name, value] of Object.entries(attributes)) element.setAttribute(name, value);
  if (text !== undefined) element.textContent = text;
  return element;
}

// Rows of whole numbers that came as one flat list: what each adds to the row before it.
function summed(flat, width) {
  const rows = [];
  for (let k = 0; k < flat.length; k += width) {
    const before = rows[rows.length - 1] || [];
    rows.push(flat.slice(k, k + width).map((value, j) => value + (before[j] || 0)));
  }
  return rows;
}

function isPhone() {
  return window.matchMedia("(max-width: 899px), (max-height: 559px)").matches;
}

function remembered(key) {
  try {
    return window.localStorage.getItem(key);
  } catch (error) {
    return null; // a browser may refuse storage to local files
  }
}

function remember(key, value) {
  try {
    window.localStorage.setItem(key, value);
  } catch (error) {
    // the choice then lasts as long as the page
  }
}

function startThemes() {
  const wish = window.matchMedia("(prefers-color-scheme: dark)").matches ? "night" : "paper";
  const chosen = remembered("georoute-theme") || wish;
  for (const input of document.querySelectorAll("input[name=theme]")) {
    input.checked = input.value === chosen;
    if (input.checked) document.documentElement.dataset.theme = chosen;
    input.addEventListener("change", () => {
      document.documentElement.dataset.theme = input.value;
      remember("georoute-theme", input.value);
      document.dispatchEvent(new Event("themechange"));
    });
  }
}

function foldOnPhone() {
  if (!isPhone()) return;
  for (const part of document.querySelectorAll("details.fold-on-phone")) part.open = false;
}

// Paper has no folds.
window.addEventListener("beforeprint", () => {
  for (const part of document.querySelectorAll("details.fold-on-phone")) part.open = true;
});

startThemes();
foldOnPhone();
