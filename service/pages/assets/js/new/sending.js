// Sends the tune and says how far it is; fetch cannot tell of an upload, so this is the older way of asking.
import { Problem, tokenOfThisBrowser } from "../asking.js";
import { text } from "../texts.js";

// Gives what the API tells of the layout, or of several. `stages` hears how far it is; `giveUp` is a signal.
export async function send({ tune, movement, cutter, settings }, stages, giveUp) {
  const form = new FormData();
  form.append("tune", tune, tune.name);
  form.append("settings", new Blob([JSON.stringify(settings)], { type: "application/json" }));
  const own = await tokenOfThisBrowser();
  const asked = new XMLHttpRequest();
  asked.open("POST", `/v1/layouts?${new URLSearchParams({ movement, cutter })}`);
  asked.setRequestHeader("Accept", "application/json");
  if (own) asked.setRequestHeader("X-CSRF-Token", own);
  asked.upload.addEventListener("progress", ({ loaded, total }) => stages.sent(total ? loaded / total : 0));
  asked.upload.addEventListener("load", () => stages.planning());
  giveUp.addEventListener("abort", () => asked.abort());
  return new Promise((done, failed) => {
    const fail = (key) => failed(new Problem({ detail: text(key) }));
    asked.addEventListener("error", () => fail("common.unreachable"));
    asked.addEventListener("abort", () => fail("new.given_up"));
    asked.addEventListener("load", () => {
      let value = null;
      try {
        value = JSON.parse(asked.responseText);
      } catch {
        failed(new Problem({ detail: text("common.unexpected", { status: asked.status }) }));
        return;
      }
      if (asked.status === 201) done(value);
      else failed(new Problem(value));
    });
    if (giveUp.aborted) fail("new.given_up");
    else asked.send(form);
  });
}
