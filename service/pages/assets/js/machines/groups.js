// What holds other fields: parts, lists, rows of numbers, parts under names, and parts that may be stated in two ways.
import { el, find } from "../dom.js";
import { text } from "../texts.js";
import { leaf } from "./leaves.js";
import { pointerOf } from "./places.js";
import { begun, chosenOf, fieldsOf, isGroup, itemOf, namedOf } from "./shapes.js";

const SUMMED = 4; // values of an item that its line shows
const worded = (name, values) => text(`movements.${name}`, values);
export const wordsOf = (name) => worded(`field_${name}`);

// The fields of a part, single values before groups.
export function fieldsIn(shape, path, desk) {
  const drawn = fieldsOf(shape).map((field) => ({ ...field, words: wordsOf(field.name), path: [...path, field.name], desk }));
  const ordered = path.length ? drawn : [...drawn.filter((one) => !isGroup(one.shape)), ...drawn.filter((one) => isGroup(one.shape))];
  return ordered.map((one) => (isGroup(one.shape) ? group(one) : leaf(one)));
}

export function group(asked) {
  const { words, shape, path, needed, desk } = asked;
  const holder = el("div", { class: "group", "data-pointer": pointerOf(path) });
  const redraw = () => holder.replaceChildren(...content());
  const content = () => {
    const value = desk.valueAt(path);
    if (!needed && (value === undefined || value === null) && shape.kind !== "list") {
      return [el("button", { type: "button", class: "plain", onclick: () => restate(begun(shape)) }, worded("state", { name: words }))];
    }
    const draw = { fields: drawnFields, list: drawnList, row: drawnRow, named: drawnNamed, either: drawnEither }[shape.kind];
    return [el("fieldset", {}, el("legend", {}, words), el("p", { class: "fault" }), draw(asked, redraw), leaveOut())];
  };
  const leaveOut = () => {
    if (needed || desk.valueAt(path) === undefined) return null;
    return el("button", { type: "button", class: "plain", onclick: () => restate(undefined) }, worded("leave_out", { name: words }));
  };
  const restate = (value) => {
    desk.change(path, value);
    redraw();
    find("input, select, button", holder)?.focus();
  };
  redraw();
  return holder;
}

const drawnFields = ({ shape, path, desk }) => el("div", { class: "fields" }, fieldsIn(shape, path, desk));

function drawnRow({ words, shape, path, desk }) {
  const drawn = shape.schema.prefixItems.map((_, place) =>
    leaf({ name: "", words: worded("item", { name: words, number: place + 1 }), shape: itemOf(shape, place), path: [...path, place], needed: true, desk }),
  );
  return el("div", { class: "fields" }, drawn);
}

function drawnList({ words, shape, path, desk }, redraw) {
  const held = desk.valueAt(path);
  const values = Array.isArray(held) ? held : [];
  const add = () => {
    desk.change([...path, values.length], begun(itemOf(shape)));
    redraw();
    desk.reveal(pointerOf([...path, values.length]));
  };
  const remove = (place) => {
    desk.change([...path, place], undefined);
    redraw();
    desk.reveal(pointerOf(path));
  };
  return el(
    "div",
    { class: "list" },
    values.length ? values.map((_, place) => item(place)) : el("p", { class: "quiet" }, worded("empty_list")),
    el("button", { type: "button", class: "plain", onclick: add }, worded("another", { name: words })),
  );

  function item(place) {
    const here = [...path, place];
    const name = worded("item", { name: words, number: place + 1 });
    const own = itemOf(shape);
    const away = el("button", { type: "button", class: "plain", "aria-label": worded("remove_item", { name }), onclick: () => remove(place) }, worded("remove"));
    if (!isGroup(own)) return el("div", { class: "single" }, leaf({ name: "", words: name, shape: own, path: here, needed: true, desk }), away);
    return folded({ words: String(place + 1), own, path: here, away, desk });
  }
}

function drawnNamed({ words, shape, path, desk }, redraw) {
  const entry = el("input", { type: "text", autocomplete: "off", "aria-label": worded("map_name", { name: words }) });
  const add = () => {
    if (!entry.value.trim() || entry.value.trim() in (desk.valueAt(path) ?? {})) return entry.focus();
    const here = [...path, entry.value.trim()];
    desk.change(here, begun(namedOf(shape)));
    redraw();
    return desk.reveal(pointerOf(here));
  };
  const items = Object.keys(desk.valueAt(path) ?? {}).map((name) => {
    const here = [...path, name];
    const remove = () => {
      desk.change(here, undefined);
      redraw();
      desk.reveal(pointerOf(path));
    };
    const away = el("button", { type: "button", class: "plain", "aria-label": worded("remove_item", { name }), onclick: remove }, worded("remove"));
    return folded({ words: name, own: namedOf(shape), path: here, away, desk });
  });
  return el("div", { class: "list" }, items, el("span", { class: "adding" }, entry, el("button", { type: "button", class: "plain", onclick: add }, worded("another", { name: words }))));
}

// An item of a list behind one line that sums it up; its fields are made when it is first opened.
function folded({ words, own, path, away, desk }) {
  const sum = el("span", { class: "sum" });
  const body = el("div", { class: "fields" });
  const fold = el("details", { "data-pointer": pointerOf(path) }, el("summary", {}, el("b", {}, words), " ", sum), body, away);
  const build = () => {
    if (!body.childElementCount) body.append(...fieldsIn(own, path, desk));
  };
  fold.addEventListener("toggle", () => fold.open && (build(), desk.show()));
  desk.watch(fold, { build, sum: () => sum.replaceChildren(summed(desk.valueAt(path))) });
  return fold;
}

function summed(value) {
  const plain = Object.entries(value ?? {}).map(([name, one]) => [name, one !== null && typeof one === "object" && "value" in one ? one.value : one]);
  const shown = plain.filter(([, one]) => one === null || typeof one !== "object").slice(0, SUMMED);
  return shown.map(([name, one]) => `${wordsOf(name)} ${one}`).join(" · ");
}

function drawnEither({ name, words, shape, path, needed, desk }, redraw) {
  const chosen = chosenOf(shape, desk.valueAt(path));
  const choose = ({ target }) => {
    const wanted = shape.choices[Number(target.value)];
    desk.change(path, kept(wanted, desk.valueAt(path)));
    redraw();
    find("select", desk.elementAt(pointerOf(path)))?.focus();
  };
  const options = shape.choices.map((one, place) => el("option", { value: place, selected: one === chosen }, choiceWords(one)));
  const draw = { fields: drawnFields, list: drawnList }[chosen.kind];
  return el(
    "div",
    {},
    el("label", { class: "either" }, worded("written_as", { name: words }), el("select", { onchange: choose }, options)),
    draw({ name, words, shape: chosen, path, needed, desk }, redraw),
  );
}

function choiceWords(shape) {
  if (shape.kind === "list") return worded("shape_list");
  const names = fieldsOf(shape).map((field) => wordsOf(field.name));
  return worded("shape_fields", { names: names.join(", ") });
}

// What of a value has a place in another way to state it.
function kept(shape, value) {
  if (shape.kind === "list") return [];
  const names = fieldsOf(shape).map((field) => field.name);
  return { ...begun(shape), ...Object.fromEntries(Object.entries(value ?? {}).filter(([name]) => names.includes(name) && !Array.isArray(value))) };
}
