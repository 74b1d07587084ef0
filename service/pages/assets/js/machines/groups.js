// What holds other fields: parts, lists, rows of numbers, parts under names, and parts that may be stated in two ways.
import { el, find } from "../dom.js";
import { text } from "../texts.js";
import { cellControl } from "./cells.js";
import { combOf } from "./comb.js";
import { leaf, wordsOf } from "./leaves.js";
import { generalOf, pointerOf } from "./places.js";
import { begun, chosenOf, fieldsOf, isFlat, isGroup, itemOf, namedOf } from "./shapes.js";
import { drawnTable } from "./tables.js";

const SUMMED = 4; // values of an item that its line shows
const worded = (name, values) => text(`movements.${name}`, values);

// The whole document: its sections in the order in which a movement is measured, what is not stated at the end.
export function sectionsIn(shape, desk) {
  const named = new Map(told(shape, [], desk).map((one) => [one.name, one]));
  const isAbsent = (one) => isGroup(one.shape) && !one.needed && desk.valueAt(one.path) === undefined;
  const drawn = desk.data.sections.flatMap(({ title, names }) => {
    const fields = names.map((name) => named.get(name)).filter((one) => !isAbsent(one));
    if (title === null) return fields.map(drawnOne);
    return [el("fieldset", { class: "section" }, el("legend", {}, title), el("div", { class: "fields" }, usualFirst(fields, desk)))];
  });
  const absent = [...named.values()].filter(isAbsent);
  return absent.length ? [...drawn, el("div", { class: "absent" }, absent.map(drawnOne))] : drawn;
}

const told = (shape, path, desk) =>
  fieldsOf(shape).map((field) => ({ ...field, words: wordsOf(field.name), path: [...path, field.name], desk }));
const drawnOne = (one) => (isGroup(one.shape) ? group(one) : leaf(one));

// The fields of a part: what is needed or stated, and behind one line what else may be stated.
const fieldsIn = (shape, path, desk) => usualFirst(told(shape, path, desk), desk);

function usualFirst(fields, desk) {
  const isRare = (one) => !one.needed && desk.valueAt(one.path) === undefined && !desk.data.usual.includes(generalOf(one.path));
  const rare = fields.filter(isRare);
  const drawn = fields.filter((one) => !isRare(one)).map(drawnOne);
  if (!rare.length) return drawn;
  const names = rare.map((one) => one.words).join(", ");
  return [...drawn, el("details", { class: "rare" }, el("summary", {}, worded("rare", { names })), el("div", { class: "fields" }, rare.map(drawnOne)))];
}

export function group(asked) {
  const { words, shape, path, needed, desk } = asked;
  const holder = el("div", { class: `group of-${shape.kind}`, "data-pointer": pointerOf(path) });
  const redraw = () => holder.replaceChildren(...content());
  const content = () => {
    const value = desk.valueAt(path);
    if (!needed && (value === undefined || value === null)) {
      const first = shape.kind === "list" ? [begun(itemOf(shape))] : begun(shape);
      return [el("button", { type: "button", class: "plain", onclick: () => restate(first) }, worded("state", { name: words })), el("p", { class: "fault" })];
    }
    const draw = { fields: drawnFields, list: drawnList, row: drawnRow, named: drawnNamed, either: drawnEither }[shape.kind];
    return [el("fieldset", {}, el("legend", {}, words), el("p", { class: "fault" }), [draw(asked, redraw)].flat(), leaveOut())];
  };
  const leaveOut = () => {
    if (needed || desk.valueAt(path) === undefined) return null;
    return el("button", { type: "button", class: "plain leave", onclick: () => restate(undefined) }, worded("leave_out", { name: words }));
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
  const cells = shape.schema.prefixItems.map((_, place) => {
    const here = [...path, place];
    const id = `at${pointerOf(here)}`;
    const label = worded("item", { name: words, number: place + 1 });
    const control = cellControl({ id, shape: itemOf(shape, place), path: here, desk, label });
    return el("div", { class: "field", "data-pointer": pointerOf(here) }, control, el("p", { class: "fault", id: `${id}-fault` }));
  });
  return el("div", { class: "in-a-row" }, cells);
}

function drawnList(asked, redraw) {
  const { words, shape, path, desk } = asked;
  if (isFlat(itemOf(shape))) return [pointerOf(path) === "/teeth" ? combOf(desk, path) : null, drawnTable(asked, redraw)];
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
  const names = shape.schema.propertyNames?.enum;
  const label = worded("map_name", { name: words });
  const entry = names
    ? el("select", { "aria-label": label }, names.filter((name) => !(name in (desk.valueAt(path) ?? {}))).map((name) => el("option", {}, name)))
    : el("input", { type: "text", autocomplete: "off", "aria-label": label });
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
    [draw({ name, words, shape: chosen, path, needed, desk }, redraw)].flat(),
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
