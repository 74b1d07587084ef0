// After a short pause the service is asked for what only it can find: rules between fields. Nothing is kept there.
import { ask } from "../asking.js";

const PAUSE_MS = 600;

export function checkAfterPauses(desk) {
  let waiting = null;
  desk.onChange = () => {
    clearTimeout(waiting);
    waiting = setTimeout(() => check(desk), PAUSE_MS);
  };
}

async function check(desk) {
  if (!desk.isJson) return;
  const seen = desk.area.value;
  const isWhole = desk.ownFaults().size === 0; // the service looks at rules between fields last, when each is right
  let faults = [];
  try {
    if (isWhole) ({ faults } = (await ask("POST", desk.data.check_at, { body: seen, headers: { "Content-Type": "application/json" } })).value);
  } catch {
    return; // saving tells what is the matter
  }
  if (seen !== desk.area.value) return; // it was written on; the next pause asks again
  desk.take(faults);
}
