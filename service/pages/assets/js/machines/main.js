// The form of a movement or a cutter, made from the schema that the service publishes.
import { ask } from "../asking.js";
import { el, find, pageData, say } from "../dom.js";
import { text } from "../texts.js";
import { Desk } from "./desk.js";
import { checkAfterPauses } from "./rules_there.js";
import { save } from "./saving.js";
import { written } from "./writing.js";

const data = pageData("machine-data");
const form = find("#form");

function toFile(desk) {
  const address = URL.createObjectURL(new Blob([desk.area.value], { type: "application/json" }));
  el("a", { href: address, download: `${desk.value.id || data.kind}.json` }).click();
  setTimeout(() => URL.revokeObjectURL(address), 1000);
}

async function fromFile(desk, file) {
  if (!file) return;
  try {
    desk.load(await file.text());
    say(text("movements.file_read", { name: file.name }));
  } catch {
    say(text("movements.not_read"));
  }
}

function toFirst(desk) {
  desk.showsAll = true;
  desk.reveal(desk.faults().keys().next().value);
}

async function start() {
  const { value: schema } = await ask("GET", data.schema_at);
  const desk = new Desk({ data, schema, form, area: find("#json-text") });
  desk.load(data.id === null ? `${written(JSON.parse(data.text))}\n` : data.text);
  desk.isChanged = false;
  checkAfterPauses(desk);
  form.addEventListener("submit", (event) => event.preventDefault());
  find("#save").addEventListener("click", () => save(desk));
  find("#first").addEventListener("click", () => toFirst(desk));
  find("#to-file").addEventListener("click", () => toFile(desk));
  find("#json-file").addEventListener("change", ({ target }) => fromFile(desk, target.files[0]));
  addEventListener("beforeunload", (event) => desk.isChanged && event.preventDefault());
  form.dataset.ready = "true";
}

start().catch((fault) => find("#answer").replaceChildren(el("p", { class: "problem-detail" }, fault.message)));
