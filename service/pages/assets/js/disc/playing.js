// Plays: the disc turns in step with the sound. Tests and who else wants to know read the stage's data attributes:
// data-playing, data-turned-deg and data-sound-s, which are what is drawn.
import { find, findAll } from "../dom.js";
import { text } from "../texts.js";
import { Clock } from "./clock.js";
import { barAt } from "./placing.js";

const WORDS_EVERY_MS = 250;
const AHEAD = 0.8; // of the chart's width: where the head may go before the chart follows
const AT_END_S = 0.01; // s before the end from which playing begins anew

export class Playing {
  #stage;
  #state;
  #turning;
  #chart;
  #clock;
  #play = find("#play");
  #range = find("#turned");
  #where = find("#where");
  #worded_ms = -Infinity;
  #frame = 0;

  constructor(stage, state, turning, chart) {
    [this.#stage, this.#state, this.#turning, this.#chart] = [stage, state, turning, chart];
    const note = find("#sound-note");
    const speed = find("#speed");
    this.#clock = new Clock(find("#sound"), {
      onEnd: () => this.stop(),
      onSilent: () => { note.textContent = text("disc.silent"); },
      onSound: () => { note.textContent = ""; },
    });
    this.#play.addEventListener("click", () => this.toggle());
    this.#range.addEventListener("input", () => this.seek(Number(this.#range.value)));
    speed.addEventListener("change", () => this.#clock.speed(Number(speed.value)));
    for (const choice of findAll("input[name=hear]")) choice.addEventListener("change", () => this.#listen());
    state.subscribe("shown", () => this.isPlaying && this.#listen());
    this.#clock.speed(Number(speed.value));
    stage.dataset.playing = "false";
    this.seek(0);
  }

  get isPlaying() {
    return this.#stage.dataset.playing === "true";
  }

  toggle() {
    if (this.isPlaying) this.stop();
    else this.start();
  }

  start() {
    if (this.#clock.at_s >= this.#turning.end_s - AT_END_S) this.#clock.seek(0);
    this.#listen();
    this.#clock.start();
    this.#play.textContent = text("disc.stop");
    this.#stage.dataset.playing = "true";
    this.#frame = requestAnimationFrame(() => this.#step());
  }

  stop() {
    cancelAnimationFrame(this.#frame);
    this.#clock.stop();
    this.#play.textContent = text("disc.play");
    this.#stage.dataset.playing = "false";
    this.#tellWhere();
  }

  seek(turned_deg) {
    this.#clock.seek(this.#turning.timeAt(turned_deg));
    this.#drawAt(this.#clock.at_s);
    this.#tellWhere();
  }

  // The sound that is chosen, of the disc that is shown; the place in it stays.
  #listen() {
    this.#clock.source(this.#state.hearing[find("input[name=hear]:checked")?.value]);
  }

  #step() {
    this.#frame = requestAnimationFrame(() => this.#step());
    const now = performance.now(); // a late frame is told the moment it should have begun
    const sound_s = this.#clock.read(now);
    this.#drawAt(sound_s);
    if (this.#clock.isSilent && sound_s >= this.#turning.end_s) return this.stop();
    if (now - this.#worded_ms < WORDS_EVERY_MS) return;
    this.#worded_ms = now;
    this.#tellWhere();
    this.#chart.follow(this.#state.turned_deg, AHEAD);
  }

  #drawAt(sound_s) {
    const turned_deg = this.#turning.angleAt(sound_s);
    this.#state.turn(turned_deg);
    this.#stage.dataset.turnedDeg = turned_deg.toFixed(4);
    this.#stage.dataset.soundS = sound_s.toFixed(4);
  }

  #tellWhere() {
    this.#range.value = this.#state.turned_deg;
    this.#where.textContent = wordsFor(this.#state);
    this.#range.setAttribute("aria-valuetext", this.#where.textContent);
  }
}

function wordsFor(state) {
  const { movement, turned_deg } = state;
  const deg = turned_deg.toFixed(1);
  if (turned_deg < movement.before_music_deg) return text("disc.turned_value_before", { deg });
  if (turned_deg > 360 - movement.after_music_deg) return text("disc.turned_value_after", { deg });
  const s = (((turned_deg - movement.before_music_deg) * movement.revolution_s) / 360).toFixed(1);
  return text("disc.turned_value", { deg, s, bar: barAt(state.shown, turned_deg) ?? "–" });
}
