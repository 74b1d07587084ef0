// What happens to the order, as the API streams it; where there is no stream, the order is asked for again and again.
import { pageData } from "../dom.js";
import { ask } from "../asking.js";

const ASKS_EVERY_MS = 15_000; // where there is no stream
const LOOKS_EVERY_MS = 3_000; // while a worker has the order: that one took it is no event

// Calls `happened` where the order is another than the one of the version last seen.
function lookAt(address, version, happened) {
  let seen = version;
  return async () => {
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
}

// Calls `happened` after each event past those that the page shows. A page that nobody looks at holds no stream: a
// browser opens few connections to one service, and each stream takes one for itself.
export function followEvents({ address, events, last, types, version }, happened) {
  const look = lookAt(address, version, happened);
  let stream = null;
  let after = last;
  let isRefused = false;
  const open = () => {
    stream = new EventSource(`${events}?after=${after}`);
    for (const type of types) {
      stream.addEventListener(type, ({ lastEventId }) => {
        after = lastEventId;
        happened();
      });
    }
    stream.addEventListener("error", () => {
      // A stream that ends is opened anew by the browser, from the last event on; one that was refused is not.
      isRefused = stream?.readyState === EventSource.CLOSED;
    });
  };
  const openOrClose = () => {
    stream?.close();
    stream = null;
    if (!document.hidden) open();
  };
  setInterval(() => !document.hidden && pageData("order-data").unplanned && look(), LOOKS_EVERY_MS);
  setInterval(() => !document.hidden && isRefused && look(), ASKS_EVERY_MS);
  document.addEventListener("visibilitychange", openOrClose);
  openOrClose();
}
