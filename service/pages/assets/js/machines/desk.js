// The document that is worked on. Fields and text are two views of it; a change in one is shown in the other at once.
import { el, find, findAll } from "../dom.js";
import { text } from "../texts.js";
import { faultsOf } from "./checking.js";
import { sectionsIn } from "./groups.js";
import { at, pointerOf, put } from "./places.js";
import { shapeOf } from "./shapes.js";
import { written } from "./writing.js";

export class Desk {
  constructor({ data, schema, form, area }) {
    Object.assign(this, { data, form, area, shape: shapeOf(schema, schema), value: {}, isJson: true, showsAll: false });
    this.touched = new Set();
    this.wideTables = new Set(); // pointers of tables that show all their columns
    this.onChange = () => {};
    this.order = data.sections.flatMap(({ names }) => names);
    this.told = new Map(); // faults that the service found, by pointer, till their place is changed
    this.watched = new Map(); // folded items: how they are built and summed up
    area.addEventListener("input", () => this.takeText());
  }

  valueAt(path) { return at(this.value, path); }

  isFixed(path) { return this.data.id !== null && pointerOf(path) === "/id"; }

  watch(fold, how) {
    this.watched.set(fold, how);
    how.sum();
  }

  change(path, value) {
    const pointer = pointerOf(path);
    put(this.value, path, value);
    this.touched.add(pointer);
    for (const place of this.told.keys()) if (place === pointer || place.startsWith(`${pointer}/`)) this.told.delete(place);
    this.area.value = `${written(this.value)}\n`;
    this.isChanged = true;
    this.show();
    this.onChange();
  }

  // Takes a text as the document; the fields wait as long as it is no JSON object.
  load(words) {
    this.area.value = words;
    this.takeText();
  }

  takeText() {
    this.isChanged = true;
    const { value, why } = parsed(this.area.value);
    this.isJson = why === null;
    const place = document.getElementById("json-fault");
    place.textContent = why === null ? "" : text("movements.fault_json", { why });
    this.area.setAttribute("aria-invalid", String(!this.isJson));
    this.form.inert = !this.isJson;
    if (this.isJson) {
      this.value = value;
      this.told.clear();
      this.draw();
    }
    this.show();
    this.onChange();
  }

  // Takes what the service found in place of what it found before.
  take(faults) {
    this.told = new Map(faults.map(({ pointer, detail }) => [pointer, detail]));
    this.show();
  }

  draw() {
    const open = findAll("details[open]", this.form).map((fold) => fold.dataset.pointer);
    this.watched.clear();
    this.form.replaceChildren(...sectionsIn(this.shape, this));
    for (const pointer of open) this.unfold(pointer);
  }

  elementAt(pointer) { return find(`[data-pointer="${CSS.escape(pointer)}"]`, this.form); }

  unfold(pointer) {
    const fold = this.elementAt(pointer);
    if (fold?.tagName !== "DETAILS") return;
    this.watched.get(fold)?.build();
    fold.open = true;
  }

  // Goes to the field at a pointer, or to what lies nearest around it.
  reveal(pointer) {
    const parts = pointer.split("/");
    const places = parts.map((_, end) => parts.slice(0, end + 1).join("/"));
    for (const place of places) this.unfold(place);
    const nearest = [...places].reverse().map((place) => this.elementAt(place)).find(Boolean) ?? this.form;
    for (let fold = nearest.closest("details"); fold; fold = fold.parentElement.closest("details")) fold.open = true;
    this.show();
    (find("input:not([readonly]), select, summary, button", nearest) ?? nearest).focus();
  }

  // What can be seen to be wrong here, by pointer, in the order of the form.
  ownFaults() {
    const placeOf = ({ path }) => this.order.indexOf(path[0]);
    const found = faultsOf(this.shape, this.value, this.data.units).sort((one, other) => placeOf(one) - placeOf(other));
    return new Map(found.map(({ path, why }) => [pointerOf(path), why]));
  }

  faults() { return new Map([...this.ownFaults(), ...this.told]); }

  show() {
    for (const [fold, how] of this.watched) {
      if (fold.isConnected) how.sum();
      else this.watched.delete(fold);
    }
    const faults = this.isJson ? this.faults() : new Map();
    const isShown = (pointer) => this.showsAll || this.told.has(pointer) || this.isTouched(pointer);
    for (const place of findAll("[data-pointer]", this.form)) mark(place, faults, isShown);
    for (const fold of findAll("details.rare", this.form)) fold.classList.toggle("to-mend", find(".fault:not(:empty)", fold) !== null);
    this.count(faults);
  }

  count(faults) {
    const words = faults.size === 0 ? "all_well" : faults.size === 1 ? "to_mend_one" : "to_mend";
    document.getElementById("count").textContent = this.isJson ? text(`movements.${words}`, { count: faults.size }) : "";
    document.getElementById("first").hidden = faults.size === 0;
    // What has no field of its own stands here, so that nothing is told unseen.
    const loose = [...this.told].filter(([pointer]) => this.elementAt(pointer) === null).map(([, why]) => why);
    document.getElementById("whole-fault").textContent = loose.join("; ");
  }

  isTouched(pointer) {
    return [...this.touched].some((place) => place === pointer || pointer === `${place}/plus_minus`);
  }
}

function parsed(words) {
  try {
    const value = JSON.parse(words);
    const isObject = value !== null && typeof value === "object" && !Array.isArray(value);
    return { value, why: isObject ? null : text("movements.fault_object") };
  } catch (fault) {
    return { value: null, why: fault.message };
  }
}

function mark(place, faults, isShown) {
  const pointer = place.dataset.pointer;
  if (place.tagName === "DETAILS") {
    if (pointer === undefined) return;
    const inside = [...faults.keys()].some((one) => (one === pointer || one.startsWith(`${pointer}/`)) && isShown(one));
    place.classList.toggle("to-mend", inside);
    return;
  }
  const own = [pointer, ...["value", "plus_minus", "basis"].map((part) => `${pointer}/${part}`)];
  const names = place.classList.contains("field") ? own : [pointer];
  const why = names.filter((name) => faults.has(name) && isShown(name)).map((name) => faults.get(name)).join("; ");
  const fault = find(".fault", place);
  if (fault) fault.textContent = why;
  if (!place.classList.contains("field")) return;
  for (const control of findAll("input, select", place)) {
    const isOff = control.classList.contains("off-by");
    const isWrong = why && (names.length === 1 || faults.has(isOff ? `${pointer}/plus_minus` : pointer) || (!isOff && !faults.has(`${pointer}/plus_minus`)));
    if (isWrong && !(control.closest(".worth") && control.tagName === "SELECT")) control.setAttribute("aria-invalid", "true");
    else control.removeAttribute("aria-invalid");
    if (why) control.setAttribute("aria-describedby", fault.id);
    else control.removeAttribute("aria-describedby");
  }
}

// The places to mend, as a list that leads to each.
export function faultList(desk, heading, faults) {
  const rows = [...faults].map(([pointer, why]) =>
    el("li", {}, el("button", { type: "button", class: "plain", onclick: () => desk.reveal(pointer) }, pointer || text("movements.whole")), ` ${why}`),
  );
  return el("div", { class: "problem-detail", role: "group", "aria-label": heading }, el("p", {}, el("strong", {}, heading)), el("ul", {}, rows));
}
