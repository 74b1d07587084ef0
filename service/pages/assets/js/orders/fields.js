// What a person wrote into a form, as the API reads it.
import { find, findAll } from "../dom.js";
import { Problem } from "../asking.js";
import { text } from "../texts.js";

// A field that holds nothing is left out: what is left out stays as it was.
const READ = {
  text: (field) => field.value.trim() || undefined,
  number: (field) => (field.value === "" ? undefined : Number(field.value)),
  percent: (field) => (field.value === "" ? undefined : Number(field.value) / 100),
  yes: (field) => field.checked || undefined,
  json: (field) => jsonOf(field),
};

function refusal(name, detail) {
  return new Problem({ detail, invalid_params: [{ pointer: `/${name}`, detail }] });
}

function jsonOf(field) {
  if (field.value.trim() === "" || field.value === field.defaultValue) return undefined;
  try {
    return JSON.parse(field.value);
  } catch (fault) {
    throw refusal(field.name, text("orders.no_json", { why: fault.message }));
  }
}

function measuresOf(form) {
  const measures = {};
  for (const row of findAll("[data-measure]", form)) {
    const [name, value] = findAll("input", row).map((field) => field.value.trim());
    if (name === "" && value === "") continue;
    if (name === "" || value === "") {
      find("input", row).focus();
      throw new Problem({ detail: text("orders.measure_half") });
    }
    measures[name] = Number(value);
  }
  return measures;
}

// The body of a request: the fields that say their kind, and the measures where the form has them.
export function bodyOf(form) {
  const body = {};
  for (const field of findAll("[data-kind]", form)) {
    if (field.type === "radio" && !field.checked) continue;
    const value = READ[field.dataset.kind](field);
    if (value !== undefined) body[field.name] = value;
  }
  const measures = measuresOf(form);
  if (Object.keys(measures).length > 0) body.measures = measures;
  return body;
}
