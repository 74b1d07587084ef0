// The page of a disc: drawing, chart, panel, findings and playing, all around one state.
import { find, pageData } from "../dom.js";
import { openChart } from "./chart.js";
import { discDrawing } from "./disc_drawing.js";
import { openFindings } from "./findings.js";
import { openKeys } from "./keys.js";
import { openPanel } from "./panel.js";
import { openPlaying } from "./playing.js";
import { openPointing } from "./pointing.js";
import { openState } from "./state.js";
import { turningOf } from "./turning.js";
import { openView } from "./view.js";

export function openDisc(data) {
  const stage = find("#stage");
  const state = openState(data);
  const drawn = discDrawing(state);
  stage.replaceChildren(drawn.element);
  const chart = openChart(state);
  const playing = openPlaying(stage, state, turningOf(data.turning, data.movement), chart);
  const { seek, toggle } = playing;
  const view = openView(stage, drawn, state, seek);
  openPanel(state);
  const pointing = openPointing(state, { drawn, view, chart, seek });
  openKeys([stage, chart.scroll], state, { view, pointing, toggle });
  openFindings(state, { drawn, view, chart });
  find("#nearer").addEventListener("click", view.nearer);
  find("#farther").addEventListener("click", view.farther);
  find("#whole").addEventListener("click", view.whole);
  find("#to-rest").addEventListener("click", () => seek(0));
  stage.dataset.ready = "true";
  return { state, drawn, view, chart, playing, pointing };
}

openDisc(pageData("disc-data"));
