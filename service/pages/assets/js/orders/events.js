// What happens to the order, as the API streams it; where there is no stream, the order is asked for again and again.
import { pageData } from "../dom.js";
import { ask } from "../asking.js";

const ASKS_EVERY_MS = 15_000; // where there is no stream
const LOOKS_EVERY_MS = 3_000; // while a worker has the order: that one took it is no event

// Calls `happened` after each event past those that the page shows.
export function followEvents({ address, events, last, types, version }, happened) {
  let seen = version;
  const look = async () => {
    try {
      const { headers } = await ask("GET", address, { headers: { "If-None-Match": `"${seen}"` } });
      const now = headers.get("ETag")?.replaceAll(/\D/g, "");
      if (now && now !== String(seen)) {
        seen = now;
        await happened();
      }
    } catch {
      // away for a moment, or unchanged (304): asked again the next time
    }
  };
  setInterval(() => {
    if (pageData("order-data").unplanned) look();
  }, LOOKS_EVERY_MS);
  const stream = new EventSource(`${events}?after=${last}`);
  for (const type of types) stream.addEventListener(type, () => happened());
  stream.addEventListener("error", () => {
    // A stream that ends is opened anew by the browser, from the last event on; one that was refused is not.
    if (stream.readyState === EventSource.CLOSED) setInterval(look, ASKS_EVERY_MS);
  });
}
