// Saves the document by the API, and says in words what came of it; what was written stays whatever comes.
import { ask, Problem } from "../asking.js";
import { el, find, say } from "../dom.js";
import { text } from "../texts.js";
import { faultList } from "./desk.js";

const MOVED = 412; // RFC 9110 section 15.5.13: what was expected to be in force is not
const worded = (name, values) => text(`movements.${name}`, values);

export async function save(desk) {
  desk.showsAll = true;
  desk.told.clear();
  desk.show();
  if (!desk.isJson) return desk.area.focus();
  const faults = desk.ownFaults();
  if (faults.size) {
    answer(faultList(desk, worded("mend_first"), faults), false);
    say(worded("mend_first"));
    return desk.reveal(faults.keys().next().value);
  }
  const { id } = desk.value;
  answer(el("p", { class: "quiet" }, worded("saving")), false);
  const { data } = desk;
  const expected = data.tag === null ? { "If-None-Match": "*" } : { "If-Match": data.tag };
  try {
    const headers = { "Content-Type": "application/json", ...expected };
    const saved = await ask("PUT", data.save_at + (data.id ?? id), { body: desk.area.value, headers });
    return await takeSaved(desk, saved.value);
  } catch (fault) {
    if (!(fault instanceof Problem)) throw fault;
    return tell(desk, fault.told, id);
  }
}

async function takeSaved(desk, saved) {
  const { data } = desk;
  const isSame = data.tag === saved.entity_tag;
  Object.assign(data, { id: saved.id, tag: saved.entity_tag });
  desk.showsAll = false;
  desk.touched.clear();
  history.replaceState(null, "", `${data.page_at}${saved.id}/edit`);
  const kept = await fetch(`${data.save_at}${saved.id}?as=written`, { headers: { Accept: "application/json" } });
  if (kept.ok) desk.load(await kept.text());
  desk.isChanged = false;
  const words = isSame ? worded("unchanged") : worded("saved", { revision: saved.revision });
  answer(el("p", { class: "note good" }, words, " ", el("a", { href: data.page_at + saved.id }, worded("look"))));
  say(words);
}

function tell(desk, told, id) {
  if (told.status === MOVED) return answer(desk.data.tag === null ? taken(desk, id) : moved(desk));
  const faults = told.invalid_params ?? [];
  if (!faults.length) return answer(el("p", { class: "problem-detail" }, worded("lost_connection", { detail: told.detail ?? told.title })));
  desk.take(faults);
  answer(faultList(desk, worded("refused"), desk.told), false);
  say(worded("refused"));
  return desk.reveal(faults[0].pointer);
}

function taken(desk, id) {
  const look = el("a", { href: desk.data.page_at + id, target: "_blank" }, worded("taken_look", { id }));
  return el("div", { class: "problem-detail" }, el("p", {}, worded("taken", { id })), el("p", {}, look));
}

function moved(desk) {
  const { id, page_at: pageAt, save_at: saveAt } = desk.data;
  const over = async () => {
    const newest = await ask("GET", `${saveAt}${id}`);
    desk.data.tag = newest.headers.get("ETag");
    answer(el("p", { class: "note" }, worded("over_ready")));
  };
  return el(
    "div",
    { class: "problem-detail" },
    el("p", {}, worded("moved", { id })),
    el("p", {}, el("a", { href: pageAt + id, target: "_blank" }, worded("moved_look"))),
    el("button", { type: "button", class: "plain", onclick: over }, worded("moved_over")),
  );
}

function answer(shown, takesFocus = true) {
  const place = find("#answer");
  place.replaceChildren(shown);
  if (takesFocus) place.focus();
}
