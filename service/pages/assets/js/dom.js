// Elements made from names, attributes and children; never from strings of HTML.
const SVG = "http://www.w3.org/2000/svg";

export const find = (selector, within = document) => within.querySelector(selector);
export const findAll = (selector, within = document) => [...within.querySelectorAll(selector)];

function filled(element, attributes, children) {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === null || value === undefined || value === false) continue;
    if (name.startsWith("on")) element.addEventListener(name.slice(2), value);
    else element.setAttribute(name, value === true ? "" : value);
  }
  element.append(...children.flat().filter((child) => child !== null && child !== undefined));
  return element;
}

export const el = (tag, attributes = {}, ...children) => filled(document.createElement(tag), attributes, children);
export const svg = (tag, attributes = {}, ...children) =>
  filled(document.createElementNS(SVG, tag), attributes, children);

// The data a page brings in a block of its own.
export const pageData = (id) => JSON.parse(document.getElementById(id).textContent);

// Said to who cannot see what has changed.
export function say(words) {
  document.getElementById("said").textContent = words;
}
