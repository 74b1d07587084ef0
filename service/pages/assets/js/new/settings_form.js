// The form and the settings document: each field with data-at stands for the value at that JSON pointer.
import { find, findAll } from "../dom.js";

const FORMAT = "discwright-settings/1";
// Which choice shows the fields of an end of the passage, by the field of the document that is stated.
const PICKS = ["bar", "s"];

const stepsOf = (pointer) => pointer.split("/").slice(1);
const isShown = (field) => field.closest("[data-when]")?.hidden !== true;
const isObject = (value) => value !== null && typeof value === "object" && !Array.isArray(value);

function defaultOf(field) {
  return field.tagName === "SELECT" ? find("option[selected]", field).value : field.defaultValue;
}

// What stands in a field as the document has it; a number that is none stays text, and the service says so.
function valueOf(field) {
  const words = field.value.trim();
  const figure = (text) => (text !== "" && Number.isFinite(Number(text)) ? Number(text) : text);
  if (field.dataset.kind === "list") return words.split(/[\s,;]+/).filter(Boolean).map(figure);
  return ["number", "whole"].includes(field.dataset.kind) ? figure(words) : words;
}

function put(tree, steps, value) {
  const [step, ...further] = steps;
  if (!further.length) tree[step] = value;
  else if (isObject((tree[step] ??= Object.create(null)))) put(tree[step], further, value);
}

function* leavesOf(tree, steps = []) {
  for (const [name, value] of Object.entries(tree)) {
    if (isObject(value)) yield* leavesOf(value, [...steps, name]);
    else yield [[...steps, name], value];
  }
}

export class SettingsForm {
  #form;
  #carried = new Map(); // by pointer: [steps, value] of a document taken that no field shows

  constructor(form) {
    this.#form = form;
    form.addEventListener("change", () => this.showWhatDepends());
    this.showWhatDepends();
  }

  get #fields() {
    return findAll("[data-at]", this.#form);
  }

  showWhatDepends() {
    for (const holder of findAll("[data-when]", this.#form)) {
      const chosen = find(`#${holder.dataset.when}`, this.#form).value;
      holder.hidden = !holder.dataset.among.split(" ").includes(chosen);
    }
  }

  // Fields that are shown, cannot be empty, and are.
  missing() {
    return findAll("[aria-required][data-at]", this.#form).filter((field) => isShown(field) && !field.value.trim());
  }

  // The document: what differs from the defaults, an empty field being its default.
  read() {
    const tree = Object.create(null);
    tree.format = FORMAT;
    for (const [steps, value] of this.#carried.values()) put(tree, steps, value);
    for (const field of this.#fields) {
      if (!isShown(field) || !field.value.trim() || field.value === defaultOf(field)) continue;
      put(tree, stepsOf(field.dataset.at), valueOf(field));
    }
    return tree;
  }

  // Pointers of what is carried along, with the values.
  get carried() {
    return [...this.#carried].map(([pointer, [, value]]) => [pointer, value]);
  }

  dropCarried() {
    this.#carried.clear();
  }

  // Every field as a document has it; the others go back to their defaults.
  fill(document) {
    this.#carried.clear();
    for (const field of [...this.#fields, ...findAll("[data-kind=pick]", this.#form)]) field.value = defaultOf(field);
    const leaves = [...leavesOf(document)];
    for (const [steps, value] of leaves) this.#fillOne(steps, value);
    for (const end of ["from", "to"]) {
      const stated = PICKS.find((unit) => (document.passage?.[`${end}_${unit}`] ?? null) !== null);
      if (stated) find(`#passage-${end}`, this.#form).value = stated;
    }
    this.showWhatDepends();
    for (const [steps, value] of leaves) this.#carryOne(steps, value);
  }

  #fieldAt(steps) {
    const pointer = `/${steps.join("/")}`;
    return this.#fields.find((field) => field.dataset.at === pointer);
  }

  #fillOne(steps, value) {
    const field = this.#fieldAt(steps);
    if (field === undefined || value === null) return;
    const words = Array.isArray(value) ? value.join(", ") : String(value);
    if (field.tagName === "SELECT" && ![...field.options].some((option) => option.value === words)) {
      field.append(new Option(words, words));
    }
    field.value = words;
  }

  #carryOne(steps, value) {
    const field = this.#fieldAt(steps);
    const isNothing = value === null || (Array.isArray(value) && !value.length);
    if (isNothing || (steps.length === 1 && steps[0] === "format" && value === FORMAT)) return;
    if (field !== undefined && (isShown(field) || field.value === defaultOf(field))) return;
    this.#carried.set(`/${steps.join("/")}`, [steps, value]);
  }
}
