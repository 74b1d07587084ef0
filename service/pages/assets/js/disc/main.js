// The page of a disc: drawing, chart, panel, findings and playing, all around one state.
import { find, pageData } from "../dom.js";
import { Chart } from "./chart.js";
import { discDrawing } from "./disc_drawing.js";
import { openFindings } from "./findings.js";
import { Hands } from "./hands.js";
import { openKeys } from "./keys.js";
import { openOrdering } from "./ordering.js";
import { openPanel } from "./panel.js";
import { Playing } from "./playing.js";
import { Pointing } from "./pointing.js";
import { openState } from "./state.js";
import { turningOf } from "./turning.js";
import { View } from "./view.js";
import { openRulings } from "../rulings/rulings.js";

export function openDisc(data) {
  const stage = find("#stage");
  const state = openState(data);
  const drawn = discDrawing(state);
  stage.replaceChildren(drawn.element);
  const chart = new Chart(state);
  const playing = new Playing(stage, state, turningOf(data.turning, data.movement), chart);
  const seek = (turned_deg) => playing.seek(turned_deg);
  const view = new View(stage, drawn, state, seek);
  const hands = new Hands(drawn.element, view);
  openPanel(state);
  const pointing = new Pointing(state, { drawn, view, hands, chart, seek });
  openKeys([stage, chart.scroll], state, { view, pointing, playing });
  openFindings(state, { drawn, view, chart });
  openOrdering(state);
  find("#nearer").addEventListener("click", () => view.stepBy(1));
  find("#farther").addEventListener("click", () => view.stepBy(-1));
  find("#whole").addEventListener("click", () => view.whole());
  find("#to-rest").addEventListener("click", () => seek(0));
  stage.dataset.ready = "true";
  return { state, drawn, view, chart, playing, pointing };
}

const data = pageData("disc-data");
openRulings(openDisc(data), data);
