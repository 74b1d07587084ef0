// The page as the service has it now, without losing what a person is writing or where they are.
import { find, findAll, say } from "../dom.js";
import { text } from "../texts.js";

const parts = () => findAll("[data-part]");
const given = new Map(parts().map((part) => [part.dataset.part, part.innerHTML]));

function written(within) {
  const fields = findAll("input[id], textarea[id]", within);
  return {
    values: fields.map(({ id, value, defaultValue, checked }) => ({ id, value, defaultValue, checked })),
    open: findAll("details[id][open]", within).map(({ id }) => id),
    focus: within.contains(document.activeElement) ? document.activeElement.id : "",
  };
}

function writeAgain({ values, open, focus }) {
  for (const { id, value, defaultValue, checked } of values) {
    const field = document.getElementById(id);
    if (field === null) continue;
    if (field.type === "radio" || field.type === "checkbox") field.checked = checked;
    else if (value !== defaultValue) field.value = value;
  }
  for (const id of open) document.getElementById(id)?.setAttribute("open", "");
  if (focus) (document.getElementById(focus) ?? find("#content")).focus();
}

let asked = Promise.resolve();

// One after the other: the newest answer is the one that stays.
export function refresh(wire) {
  asked = asked.then(() => fetched(wire));
  return asked;
}

async function fetched(wire) {
  let answer;
  try {
    answer = await fetch(location.href, { headers: { Accept: "text/html" } });
  } catch {
    return; // the service is away for a moment; the page is asked for again with the next event
  }
  if (!answer.ok) return;
  const fresh = new DOMParser().parseFromString(await answer.text(), "text/html");
  const before = find("#state").textContent;
  const last = lastOf(document);
  for (const part of parts()) replace(part, find(`[data-part="${part.dataset.part}"]`, fresh));
  find("#order-data").textContent = find("#order-data", fresh).textContent;
  wire();
  // A link that was made leads to what is decided about no more.
  if (find('form[data-do="proof-links"]') === null) find("#made-link").hidden = true;
  const now = find("#state").textContent;
  const happened = lastOf(document);
  if (now !== before) say(text("orders.now", { state: now, next: find("#next").textContent }));
  else if (happened !== last) say(text("orders.happened", { what: happened }));
}

// The last thing that happened, in the words of the story, the newest of which stands first.
const lastOf = (page) => find("[data-part=events] li p", page)?.textContent ?? "";

function replace(part, fresh) {
  const name = part.dataset.part;
  if (fresh === null || fresh.innerHTML === given.get(name)) return;
  given.set(name, fresh.innerHTML);
  const kept = written(part);
  part.replaceChildren(...fresh.childNodes);
  writeAgain(kept);
}
