// Sends a tune and its settings, and says how far that is; what is under way can be given up.
import { Problem, tokenOfThisBrowser } from "../asking.js";
import { text } from "../texts.js";

export class GivenUp extends Error {}

function told(request) {
  const kind = request.getResponseHeader("Content-Type") || "";
  const unexpected = { detail: text("common.unexpected", { status: request.status }) };
  if (!kind.includes("json")) return unexpected;
  try {
    return JSON.parse(request.responseText);
  } catch {
    return unexpected;
  }
}

// Gives { location, value } of the answer. Raises Problem in the service's words, or GivenUp.
// on.sent(share) while the tune is on its way, on.planning() once it has arrived; signal gives up.
export async function send({ tune, settings, movement, cutter }, on, signal) {
  const token = await tokenOfThisBrowser();
  if (signal.aborted) throw new GivenUp();
  const form = new FormData();
  form.append("tune", tune, "tune.mid");
  form.append("settings", new Blob([JSON.stringify(settings)], { type: "application/json" }), "settings.json");
  return new Promise((resolve, reject) => {
    const request = new XMLHttpRequest();
    request.open("POST", `/v1/layouts?${new URLSearchParams({ movement, cutter })}`);
    request.setRequestHeader("Accept", "application/json");
    if (token) request.setRequestHeader("X-CSRF-Token", token);
    request.upload.addEventListener("progress", ({ loaded, total }) => on.sent(total ? loaded / total : 0));
    request.upload.addEventListener("load", () => on.planning());
    request.addEventListener("load", () => {
      const value = told(request);
      if (request.status !== 201) reject(new Problem(value));
      else resolve({ location: request.getResponseHeader("Location"), value });
    });
    request.addEventListener("error", () => reject(new Problem({ detail: text("common.unreachable") })));
    request.addEventListener("abort", () => reject(new GivenUp()));
    signal.addEventListener("abort", () => request.abort());
    request.send(form);
  });
}
