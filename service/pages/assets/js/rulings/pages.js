// Another disc in the place of the one shown: its own page is asked for, and the parts of it that tell of a disc are
// put into this one, so that what stands here is what a reload would give.
import { findAll } from "../dom.js";
import { Problem } from "../asking.js";
import { text } from "../texts.js";

// Gives { data, parts, title } of the page at an address.
export async function pageAt(address) {
  let answer;
  try {
    answer = await fetch(address, { headers: { Accept: "text/html" } });
  } catch {
    throw new Problem({ detail: text("common.unreachable") });
  }
  if (!answer.ok) throw new Problem({ detail: text("common.unexpected", { status: answer.status }) });
  const page = new DOMParser().parseFromString(await answer.text(), "text/html");
  return { data: JSON.parse(page.getElementById("disc-data").textContent), parts: partsOf(page), title: page.title };
}

// The parts as they stand in a page, to be put there again later.
export const partsOf = (page) =>
  new Map(findAll("[data-part]", page).map((part) => [part.dataset.part, part.cloneNode(true)]));

export function putParts(parts, title) {
  for (const part of findAll("[data-part]")) {
    const other = parts.get(part.dataset.part);
    if (other) part.replaceWith(document.importNode(other, true));
  }
  document.title = title;
}
