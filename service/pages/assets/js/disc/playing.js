// Plays: the disc turns in step with the sound. Tests and who else wants to know read the stage's data attributes:
// data-playing, data-turned-deg and data-sound-s, which are what is drawn.
import { find, findAll } from "../dom.js";
import { text } from "../texts.js";
import { clockOf } from "./clock.js";
import { barAt } from "./placing.js";

const WORDS_EVERY_MS = 250;
const AHEAD = 0.8; // of the chart's width: where the head may go before the chart follows

export function openPlaying(stage, state, turning, chart) {
  const play = find("#play");
  const range = find("#turned");
  const where = find("#where");
  const note = find("#sound-note");
  const clock = clockOf(find("#sound"), {
    onEnd: () => stop(),
    onSilent: () => { note.textContent = text("disc.silent"); },
    onSound: () => { note.textContent = ""; },
  });
  let worded = -Infinity;
  let frame = 0;

  function drawAt(sound_s) {
    const turned_deg = turning.angleAt(sound_s);
    state.turn(turned_deg);
    stage.dataset.turnedDeg = turned_deg.toFixed(4);
    stage.dataset.soundS = sound_s.toFixed(4);
  }
  function tellWhere() {
    range.value = state.turned_deg;
    where.textContent = wordsFor(state);
    range.setAttribute("aria-valuetext", where.textContent);
  }
  function step() {
    frame = requestAnimationFrame(step);
    const now = performance.now(); // a late frame is told the moment it should have begun
    const sound_s = clock.read(now);
    drawAt(sound_s);
    if (clock.isSilent() && sound_s >= turning.end_s) return stop();
    if (now - worded < WORDS_EVERY_MS) return;
    worded = now;
    tellWhere();
    chart.follow(state.turned_deg, AHEAD);
  }
  function start() {
    if (clock.at_s() >= turning.end_s - 0.01) clock.seek(0);
    listen();
    clock.start();
    play.textContent = text("disc.stop");
    stage.dataset.playing = "true";
    frame = requestAnimationFrame(step);
  }
  function stop() {
    cancelAnimationFrame(frame);
    clock.stop();
    play.textContent = text("disc.play");
    stage.dataset.playing = "false";
    tellWhere();
  }
  function seek(turned_deg) {
    clock.seek(turning.timeAt(turned_deg));
    drawAt(clock.at_s());
    tellWhere();
  }
  const toggle = () => (stage.dataset.playing === "true" ? stop() : start());
  // The sound that is chosen, of the disc that is shown; the place in it stays.
  const listen = () => clock.source(state.hearing[find("input[name=hear]:checked")?.value]);

  play.addEventListener("click", toggle);
  range.addEventListener("input", () => seek(Number(range.value)));
  find("#speed").addEventListener("change", (event) => clock.speed(Number(event.target.value)));
  for (const choice of findAll("input[name=hear]")) {
    choice.addEventListener("change", listen);
  }
  state.subscribe("shown", () => stage.dataset.playing === "true" && listen());
  clock.speed(Number(find("#speed").value));
  stage.dataset.playing = "false";
  seek(0);
  return { toggle, seek, stop };
}

function wordsFor(state) {
  const { movement, turned_deg } = state;
  const deg = turned_deg.toFixed(1);
  if (turned_deg < movement.before_music_deg) return text("disc.turned_value_before", { deg });
  if (turned_deg > 360 - movement.after_music_deg) return text("disc.turned_value_after", { deg });
  const s = (((turned_deg - movement.before_music_deg) * movement.revolution_s) / 360).toFixed(1);
  return text("disc.turned_value", { deg, s, bar: barAt(state.shown, turned_deg) ?? "–" });
}
