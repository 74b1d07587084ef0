// What is under way: how much is sent, then how long the arrangement is being looked for. The service answers once it
// is found, so that of this stage the seconds alone are known.
import { find } from "../dom.js";
import { text } from "../texts.js";

const SECOND_MS = 1000;

// Gives { sent(share), planning(), opening(), end() }; `form` is held while it is under way.
export function begin(form) {
  const progress = find("#progress");
  const elapsed = find("#elapsed");
  let clock = null;
  const stage = (key) => { find("#stage").textContent = text(key); };
  form.inert = true;
  find("#under-way").hidden = false;
  elapsed.textContent = "";
  progress.value = 0;
  stage("new.sending");
  find("#stage").focus({ preventScroll: true });
  find("#under-way").scrollIntoView({ block: "center" });
  return {
    sent(share) {
      progress.value = share;
      elapsed.textContent = text("new.sent", { percent: Math.round(100 * share) });
    },
    planning() {
      const began_ms = performance.now();
      const tell = () => {
        elapsed.textContent = text("new.planning_for", { s: Math.floor((performance.now() - began_ms) / SECOND_MS) });
      };
      progress.removeAttribute("value");
      stage("new.planning");
      tell();
      clock = setInterval(tell, SECOND_MS);
    },
    opening() {
      clearInterval(clock);
      elapsed.textContent = "";
      stage("new.opening");
    },
    end() {
      clearInterval(clock);
      form.inert = false;
      find("#under-way").hidden = true;
    },
  };
}
