// What every page does: signs a browser out.
import { find } from "./dom.js";
import { ask } from "./asking.js";

find("#sign-out")?.addEventListener("click", async () => {
  await ask("POST", "/sign-out");
  location.assign("/sign-in");
});
