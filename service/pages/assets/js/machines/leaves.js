// The controls of single values: a number with what it is worth, a text, a choice, yes or no.
import { el } from "../dom.js";
import { text } from "../texts.js";
import { generalOf, pointerOf } from "./places.js";

const BASES = ["measured", "calculated", "assumed"];
const LONG = 28; // characters that a narrow field shows at once
const NUMBER = /^-?(0|[1-9]\d*)(\.\d+)?([eE][+-]?\d+)?$/;
const worded = (name, values) => text(`movements.${name}`, values);
export const wordsOf = (name) => worded(`field_${name}`);

// What a person typed into a number's field: a number where it is one, else the text itself, which is then a fault.
export const typed = (words) => (NUMBER.test(words.trim().replace(",", ".")) ? Number(words.trim().replace(",", ".")) : words);

const isWorth = (value) => value !== null && typeof value === "object" && "value" in value;
export const shown = (value) => (value === undefined || value === null ? "" : typeof value === "object" ? JSON.stringify(value) : String(value));

// A field: its label, its controls, a way to how it is measured, and room for its fault.
export function leaf({ name, words, shape, path, needed, desk }) {
  const id = `at${pointerOf(path)}`;
  const unit = desk.data.units[name];
  const section = sectionOf(desk.data.measured, path);
  const make = { "yes-no": choiceControl, choice: choiceControl }[shape.kind] ?? (shape.takesWorth ? worthControl : plainControl);
  const fault = el("p", { class: "fault", id: `${id}-fault` });
  return el(
    "div",
    { class: isLong(shape, desk.valueAt(path)) ? "field long" : "field", "data-pointer": pointerOf(path) },
    el(
      "span",
      { class: "naming" },
      el("label", { for: id }, words, unit ? el("span", { class: "unit" }, ` ${unit}`) : null, desk.valueAt(path) === undefined ? note(shape, needed) : null),
      section ? el("a", { class: "how", href: `/measuring#${section}`, target: "_blank", "aria-label": worded("how_of", { name: words }) }, worded("how")) : null,
    ),
    make({ id, words, shape, path, desk, needed }),
    fault,
  );
}

const isLong = (shape, value) => shape.kind === "text" && String(value ?? "").length > LONG;

function note(shape, needed) {
  if (needed || shape.kind === "fixed") return null;
  const usual = shape.byDefault;
  const value = typeof usual === "boolean" ? worded(usual ? "yes" : "no") : usual;
  if (usual === undefined || usual === null || typeof usual === "object") return null;
  return el("span", { class: "hint" }, worded("by_default", { value }));
}

function sectionOf(measured, path) {
  const place = generalOf(path);
  const begins = Object.keys(measured).filter((begin) => place === begin || place.startsWith(`${begin}/`));
  return measured[begins.sort((one, other) => other.length - one.length)[0]];
}

function plainControl({ id, shape, path, desk }) {
  const isNumber = ["number", "whole"].includes(shape.kind);
  return el("input", {
    id,
    type: "text",
    class: isNumber ? "number" : null,
    inputmode: isNumber ? "decimal" : null,
    value: shown(desk.valueAt(path)),
    readonly: shape.kind === "fixed" || desk.isFixed(path),
    autocomplete: "off",
    oninput: ({ target }) => desk.change(path, target.value === "" ? undefined : isNumber ? typed(target.value) : target.value),
  });
}

export function choiceControl({ id, shape, path, desk }) {
  const values = shape.kind === "yes-no" ? [true, false] : shape.schema.enum;
  const now = desk.valueAt(path);
  const strange = now !== undefined && now !== null && !values.includes(now) ? [now] : [];
  const options = [...strange, ...values].map((value) =>
    el("option", { value: JSON.stringify(value), selected: value === now }, value === true ? worded("yes") : value === false ? worded("no") : shown(value)),
  );
  const none = el("option", { value: "", selected: now === undefined || now === null }, worded("not_stated"));
  return el(
    "select",
    { id, onchange: ({ target }) => desk.change(path, target.value === "" ? undefined : JSON.parse(target.value)) },
    none,
    options,
  );
}

function worthControl({ id, words, path, desk }) {
  const now = desk.valueAt(path);
  const worth = isWorth(now) ? now : { value: now };
  const value = el("input", { id, type: "text", class: "number", inputmode: "decimal", autocomplete: "off", value: shown(worth.value) });
  const off = el("input", {
    type: "text", class: "number off-by", inputmode: "decimal", autocomplete: "off", value: shown(worth.plus_minus), "aria-label": worded("off_by_of", { name: words }), title: worded("off_by"),
  });
  const basis = el(
    "select",
    { "aria-label": worded("basis_of", { name: words }), title: worded("basis") },
    el("option", { value: "" }, worded("basis_none")),
    BASES.map((one) => el("option", { value: one, selected: one === worth.basis }, worded(`basis_${one}`))),
  );
  const changed = () => desk.change(path, stated(value.value, off.value, basis.value));
  for (const control of [value, off]) control.addEventListener("input", changed);
  basis.addEventListener("change", changed);
  return el("span", { class: "worth" }, value, el("span", { "aria-hidden": "true" }, "±"), off, basis);
}

function stated(value, off, basis) {
  const plain = value === "" ? undefined : typed(value);
  if (off === "" && basis === "") return plain;
  return { value: plain ?? "", ...(off === "" ? {} : { plus_minus: typed(off) }), ...(basis === "" ? {} : { basis }) };
}
