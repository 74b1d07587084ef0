// A value in one cell: a number with what it is worth stands as "12.5 ± 0.1 measured".
import { el } from "../dom.js";
import { text } from "../texts.js";
import { choiceControl, shown, typed } from "./leaves.js";

const worded = (name, values) => text(`movements.${name}`, values);
const WIDTHS = { whole: 4, number: 6, text: 8 }; // of cells, in characters
const LONG = 40; // a text that may be longer than this gets a wide cell
const WIDE = 22;

const WORTH = (bases) => new RegExp(`^(.*?)(?:\\s*(?:±|\\+/-|\\+-)\\s*(\\S+))?(?:\\s+(${bases.join("|")}))?$`, "u");

export function cellWords(value) {
  if (value === null || typeof value !== "object" || !("value" in value)) return shown(value);
  const off = value.plus_minus === undefined ? "" : ` ± ${shown(value.plus_minus)}`;
  return `${shown(value.value)}${off}${value.basis === undefined ? "" : ` ${value.basis}`}`;
}

// The value that words in a cell stand for; undefined for none.
export function cellValue(words, shape) {
  const said = words.trim();
  if (said === "") return undefined;
  if (shape.takesWorth) return worthOf(said, shape);
  if (shape.kind === "whole" || shape.kind === "number") return typed(said);
  if (shape.kind === "yes-no") return { true: true, 1: true, [worded("yes")]: true, false: false, 0: false, [worded("no")]: false }[said.toLowerCase()] ?? said;
  return said;
}

function worthOf(said, shape) {
  const [, value, off, basis] = WORTH(shape.worth.basis.enum).exec(said);
  if (off === undefined && basis === undefined) return typed(said);
  return { value: typed(value), ...(off === undefined ? {} : { plus_minus: typed(off) }), ...(basis === undefined ? {} : { basis }) };
}

export function cellControl({ id, shape, path, desk, label }) {
  if (shape.kind === "choice" || shape.kind === "yes-no") {
    const control = choiceControl({ id, shape, path, desk });
    control.setAttribute("aria-label", label);
    return control;
  }
  const isNumber = shape.kind === "whole" || shape.kind === "number";
  return el("input", {
    id,
    type: "text",
    class: isNumber ? "number" : null,
    // What is stated with its worth has signs that a keyboard of figures lacks.
    inputmode: isNumber && !shape.takesWorth ? "decimal" : null,
    size: (shape.schema.maxLength ?? 0) > LONG ? WIDE : WIDTHS[shape.kind] ?? WIDE,
    autocomplete: "off",
    "aria-label": label,
    value: cellWords(desk.valueAt(path)),
    oninput: ({ target }) => desk.change(path, cellValue(target.value, shape)),
  });
}
