// Small helpers of the page: elements, numbers, ticks, theme.
const SVG = "http://www.w3.org/2000/svg";

function make(tag, attributes = {}, ...children) {
  const node = document.createElement(tag);
  for (const [name, value] of Object.entries(attributes)) {
    if (value === false || value === null || value === undefined) continue;
    if (name === "class") node.className = value;
    else if (name.startsWith("on")) node.addEventListener(name.slice(2), value);
    else if (name === "value") node.value = value;
    else node.setAttribute(name, value === true ? "" : value);
  }
  // A notebook's own single-key commands must not take what is typed here: it looks for this on the focused node itself.
  if (["input", "select", "button", "summary", "a"].includes(tag) || attributes.tabindex) node.setAttribute("data-lm-suppress-shortcuts", "true");
  for (const child of children) if (child !== null && child !== undefined) node.append(child);
  return node;
}

function draw(tag, attributes = {}) {
  const node = document.createElementNS(SVG, tag);
  for (const [name, value] of Object.entries(attributes)) node.setAttribute(name, value);
  return node;
}

// Text is set only where it differs, so that an unchanged row costs nothing.
function say(node, text) {
  if (node.textContent !== text) node.textContent = text;
}

function niceStep(span, most) {
  const rough = span / Math.max(most, 1);
  const power = 10 ** Math.floor(Math.log10(rough));
  for (const factor of [1, 2, 2.5, 5, 10]) if (factor * power >= rough * 0.999) return factor * power;
  return 10 * power;
}

function ticksOf(low, high, most) {
  if (!(high > low)) return { at: [low], decimals: 0, step: 1 };
  const step = niceStep(high - low, most);
  const at = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + 1e-9 * step; k++) at.push(k * step);
  let decimals = Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
  if (Math.abs(step * 10 ** decimals - Math.round(step * 10 ** decimals)) > 1e-6) decimals += 1;
  return { at, decimals, step };
}

function wholeTicks(low, high, most) {
  const step = Math.max(1, Math.ceil((high - low) / most)), at = [];
  for (let k = Math.ceil(Math.max(low, 1)); k <= high; k += step) at.push(k);
  return at;
}

function written(number, decimals) {
  if (!Number.isFinite(number)) return "–";
  if (number !== 0 && (Math.abs(number) >= 1e5 || Math.abs(number) < 1e-4)) {
    const [mantissa, power] = number.toExponential(2).split("e");
    const raised = String(Number(power)).replace(/[-0-9]/g, (c) => (c === "-" ? "⁻" : "⁰¹²³⁴⁵⁶⁷⁸⁹"[c]));
    return `${mantissa.replace(/\.?0+$/, "")}·10${raised}`.replace(/^-/, "−");
  }
  const text = number.toFixed(decimals);
  return Number(text) === 0 ? (0).toFixed(decimals) : text.replace("-", "−");
}

function isDark(node) {
  const told = document.body.getAttribute("data-jp-theme-light");
  if (told === "false") return true;
  if (document.body.classList.contains("theme-dark")) return true;
  const colour = getComputedStyle(document.body).backgroundColor.match(/[\d.]+/g);
  if (colour && (colour.length < 4 || Number(colour[3]) > 0.5)) {
    const [r, g, b] = colour.map(Number);
    return 0.299 * r + 0.587 * g + 0.114 * b < 110;
  }
  return told === null && window.matchMedia("(prefers-color-scheme: dark)").matches;
}

function between(value, low, high) {
  return Math.min(Math.max(value, low), high);
}
