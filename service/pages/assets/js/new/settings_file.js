// Settings from a JSON file and to one; what of it no field shows is named, and can be left out.
import { el, find, say } from "../dom.js";
import { text } from "../texts.js";

export function tellCarried(settings) {
  const names = settings.carried.map(([pointer, value]) =>
    pointer === "/rulings" && Array.isArray(value) ? text("new.carried_rulings", { count: value.length }) : pointer,
  );
  const note = find("#carried");
  note.hidden = !names.length;
  if (names.length) find("p", note).textContent = text("new.carried", { names: names.join(", ") });
}

export async function takeFrom(file, settings) {
  const { name } = file;
  let document;
  try {
    document = JSON.parse(await file.text());
  } catch (fault) {
    return text("new.not_json", { name, why: fault.message });
  }
  if (document === null || typeof document !== "object" || Array.isArray(document)) {
    return text("new.not_object", { name });
  }
  settings.fill(document);
  tellCarried(settings);
  say(text("new.taken", { name }));
  return null;
}

export function saveAs(settings, tuneName) {
  const name = `${(tuneName || "disc").replace(/\.[^.]*$/, "")}-settings.json`;
  const address = URL.createObjectURL(
    new Blob([`${JSON.stringify(settings.read(), null, 2)}\n`], { type: "application/json" }),
  );
  el("a", { href: address, download: name }).click();
  setTimeout(() => URL.revokeObjectURL(address), 1000);
  say(text("new.saved", { name }));
}
