// A list of flat parts as a table: a row for each, rows added and removed by keys, and filled by what a spreadsheet copies.
import { el, find, findAll, say } from "../dom.js";
import { text } from "../texts.js";
import { cellControl, cellValue } from "./cells.js";
import { wordsOf } from "./leaves.js";
import { pasted } from "./pasting.js";
import { pointerOf } from "./places.js";
import { begun, fieldsOf, itemOf } from "./shapes.js";

const worded = (name, values) => text(`movements.${name}`, values);
const columnId = (path, name) => `column${pointerOf([...path, name])}`;

export function drawnTable(asked, redraw) {
  const { words, shape, path, desk } = asked;
  const values = Array.isArray(desk.valueAt(path)) ? desk.valueAt(path) : [];
  const fields = fieldsOf(itemOf(shape));
  const shown = columnsOf(fields, values, desk.wideTables.has(pointerOf(path)));
  const table = { ...asked, values, fields, shown };
  table.redraw = (place, column) => {
    redraw();
    desk.show();
    focusOn(table, place, column) || find(".under button", desk.elementAt(pointerOf(path)))?.focus();
  };
  const body = el("tbody", {}, values.map((_, place) => row(table, place)));
  body.addEventListener("keydown", (event) => byKey(table, event));
  body.addEventListener("paste", (event) => fromSpreadsheet(table, event));
  return el(
    "div",
    { class: "sheet" },
    values.length
      ? el(
          "div",
          { class: "wide tall", role: "region", tabindex: "0", "aria-label": words },
          el("table", { class: "cells" }, el("caption", { class: "visually-hidden" }, words), head(table), body),
        )
      : el("p", { class: "quiet" }, worded("empty_list")),
    el(
      "div",
      { class: "under" },
      el("button", { type: "button", class: "plain", onclick: () => add(table, values.length) }, worded("another", { name: words })),
      shown.length < fields.length || desk.wideTables.has(pointerOf(path)) ? columnsButton(table) : null,
      values.length ? el("details", { class: "keys" }, el("summary", {}, worded("table_keys")), el("p", { class: "hint" }, worded("table_keys_told"))) : null,
    ),
  );
}

// The columns that are needed or used; all of them where they are asked for.
const columnsOf = (fields, values, isWide) =>
  fields.filter(({ name, needed }) => isWide || needed || values.some((one) => one?.[name] !== undefined));

function head({ shown, path, desk }) {
  const titles = shown.map(({ name }) => {
    const unit = desk.data.units[name];
    return el("th", { scope: "col", id: columnId(path, name) }, wordsOf(name), unit ? el("span", { class: "unit" }, ` ${unit}`) : null);
  });
  return el("thead", {}, el("tr", {}, titles, el("td", {})));
}

function row(table, place) {
  const { words, path, shown, desk } = table;
  const name = worded("item", { name: words, number: place + 1 });
  const cells = shown.map(cell);
  const away = el("button", { type: "button", class: "plain away", "aria-label": worded("remove_item", { name }), onclick: () => remove(table, place) }, "×");
  return el("tr", { "data-pointer": pointerOf([...path, place]) }, cells, el("td", {}, away, el("p", { class: "fault" })));

  function cell(field) {
    const here = [...path, place, field.name];
    const id = `at${pointerOf(here)}`;
    const label = worded("cell_of", { name: wordsOf(field.name), row: name });
    const control = cellControl({ ...field, id, path: here, desk, label });
    control.dataset.column = field.name;
    return el("td", { class: "field cell", "data-pointer": pointerOf(here) }, control, el("p", { class: "fault", id: `${id}-fault` }));
  }
}

function columnsButton({ path, desk, redraw }) {
  const pointer = pointerOf(path);
  const isWide = desk.wideTables.has(pointer);
  const turn = () => {
    if (isWide) desk.wideTables.delete(pointer);
    else desk.wideTables.add(pointer);
    redraw(0, null);
  };
  return el("button", { type: "button", class: "plain columns", "aria-pressed": String(isWide), onclick: turn }, worded("all_columns"));
}

function add(table, place) {
  const { path, shape, desk, values } = table;
  const made = begun(itemOf(shape));
  const [first] = table.fields;
  // What is numbered goes on from the greatest number there is.
  if (first.shape.kind === "whole" && first.needed) made[first.name] = Math.max(0, ...values.map((one) => Number(one?.[first.name]) || 0)) + 1;
  desk.change(path, values.toSpliced(place, 0, made));
  table.redraw(place, table.fields[Math.min(1, table.fields.length - 1)].name);
}

function remove(table, place) {
  const { path, desk, values } = table;
  desk.change(path, values.toSpliced(place, 1));
  say(worded("row_removed", { number: place + 1 }));
  table.redraw(Math.min(place, values.length - 2), null);
}

function byKey(table, event) {
  const column = event.target.dataset.column;
  if (column === undefined) return;
  const { values } = table;
  const place = placeOf(event.target);
  const isChoice = event.target.tagName === "SELECT";
  const go = (to) => focusOn(table, to, column);
  const steps = {
    ArrowDown: () => !isChoice && go(place + 1),
    ArrowUp: () => !isChoice && go(place - 1),
    Enter: () => (event.altKey ? add(table, place + 1) : place + 1 < values.length ? go(place + 1) : add(table, values.length)),
    Delete: () => event.altKey && remove(table, place),
  };
  const step = steps[event.key];
  if (!step || (event.altKey && event.key.startsWith("Arrow")) || event.ctrlKey || event.metaKey) return;
  if (step() !== false) event.preventDefault();
}

function focusOn({ path, desk }, place, column) {
  const line = desk.elementAt(pointerOf([...path, place]));
  const cells = line ? findAll("[data-column]", line) : [];
  const wanted = cells.find((one) => one.dataset.column === column) ?? cells[0];
  if (!wanted) return false;
  wanted.focus();
  wanted.select?.();
  return true;
}

const placeOf = (element) => Number(element.closest("tr").dataset.pointer.split("/").pop());

function fromSpreadsheet(table, event) {
  const copied = event.clipboardData.getData("text/plain");
  if (!/[\t\n]/.test(copied.trimEnd()) || event.target.dataset.column === undefined) return;
  event.preventDefault();
  const { path, shape, desk, fields, shown, values } = table;
  const place = placeOf(event.target);
  const { rows, columns, lost } = pasted(copied, { fields, shown, from: event.target.dataset.column, wordsOf });
  const most = (shape.schema.maxItems ?? Infinity) - place;
  const taken = rows.slice(0, most);
  const made = [...values];
  taken.forEach((cells, down) => {
    const line = { ...(made[place + down] ?? begun(itemOf(shape))) };
    columns.forEach((field, across) => {
      const value = cellValue(cells[across] ?? "", field.shape);
      if (value === undefined) delete line[field.name];
      else line[field.name] = value;
      desk.touched.add(pointerOf([...path, place + down, field.name]));
    });
    made[place + down] = line;
  });
  desk.change(path, made);
  const words = rows.length > most ? worded("pasted_some", { count: taken.length, all: rows.length }) : worded("pasted", { count: taken.length });
  say(lost > 0 ? `${words} ${worded("columns_lost", { count: lost })}` : words);
  table.redraw(place, columns[0].name);
}
