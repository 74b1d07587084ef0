// Settings from a JSON file and to one. A file is taken whole or refused whole, by the schema that the service
// publishes; rules between fields are the service's, which checks all again.
import { ask } from "../asking.js";
import { el } from "../dom.js";
import { faultsOf } from "../machines/checking.js";
import { pointerOf } from "../machines/places.js";
import { shapeOf } from "../machines/shapes.js";
import { text } from "../texts.js";

const SCHEMA = "/v1/schemas/settings";
const MOST_TOLD = 8; // faults of a file; who mends those looks again

// Gives { settings } of a file, or { words } that say why not, each a line.
export async function settingsIn(file) {
  const { name } = file;
  let settings;
  try {
    settings = JSON.parse(await file.text());
  } catch (fault) {
    return { words: [text("new.settings_unread", { name, why: fault.message })] };
  }
  const { value: schema } = await ask("GET", SCHEMA);
  const faults = faultsOf(shapeOf(schema, schema), settings);
  if (faults.length === 0) return { settings };
  const told = faults.slice(0, MOST_TOLD).map(({ path, why }) => `${pointerOf(path)} ${wordsOf(why)}`.trim());
  if (faults.length > MOST_TOLD) told.push(text("new.and_more", { count: faults.length - MOST_TOLD }));
  return { words: [text("new.settings_refused", { name }), ...told] };
}

const wordsOf = (why) => (why === text("movements.fault_unknown") ? text("new.unknown_member") : why);

export function saveAs(settings, tuneName) {
  const address = URL.createObjectURL(new Blob([`${JSON.stringify(settings, null, 2)}\n`], { type: "application/json" }));
  const stem = tuneName?.replace(/\.[^.]*$/, "");
  el("a", { href: address, download: stem ? `${stem}-settings.json` : "settings.json" }).click();
  setTimeout(() => URL.revokeObjectURL(address), 1000);
}
