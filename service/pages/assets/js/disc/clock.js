// The sound's own clock, made smooth: its time comes in steps, between which performance.now goes on.
// Without a sound that can be played the clock runs by itself.
const JUMP_S = 0.08; // what is farther off than this is a seek, not a step
const DRAW_IN = 0.15; // share of what is off that is made good at each step of the sound's clock
const STALL_MS = 250; // the sound's time stands still for longer: it waits for data

export class Clock {
  #audio;
  #on;
  #base_s = 0; // time of the sound at #base_ms
  #base_ms = 0;
  #heard_s = -1; // the sound's time as it was read last, and when it changed
  #heard_ms = 0;
  #rate = 1;
  #running = false;
  #silent = true;
  #address = null;
  #wanted_s = null; // where a sound shall go on that is not there yet

  // `on`: onEnd, onSilent (it cannot be heard), onSound (it can).
  constructor(audio, on) {
    this.#audio = audio;
    this.#on = on;
    audio.addEventListener("error", () => this.#goSilent());
    audio.addEventListener("ended", () => this.#running && on.onEnd());
    audio.addEventListener("playing", on.onSound);
    audio.addEventListener("loadedmetadata", () => this.#goToWanted());
    audio.addEventListener("seeked", () => {
      if (this.#wanted_s === null) return;
      this.#wanted_s = null;
      this.#heard_s = -1;
    });
  }

  get isSilent() {
    return this.#silent;
  }

  get at_s() {
    return this.#running && this.#wanted_s === null ? this.#predicted(performance.now()) : this.#base_s;
  }

  // The time of the sound at a moment of performance.now, as smooth as the screen.
  read(now) {
    if (this.#silent) return this.#predicted(now);
    if (this.#wanted_s !== null) this.#anchor(this.#wanted_s, now); // the disc waits for the sound
    else this.#followSound(now);
    return this.#predicted(now);
  }

  // Which sound; the place in it stays. Nothing is loaded before it is played.
  source(next) {
    if (next === undefined || next === this.#address) return;
    const here_s = this.at_s;
    this.#address = next;
    this.#silent = false;
    this.#audio.src = next;
    this.seek(here_s);
    if (this.#running) this.#play();
  }

  start() {
    this.#running = true;
    this.#anchor(this.#base_s, performance.now());
    [this.#heard_s, this.#heard_ms] = [-1, performance.now()];
    if (!this.#silent) this.#play();
  }

  stop() {
    this.#anchor(this.at_s, performance.now());
    this.#running = false;
    this.#audio.pause();
  }

  seek(time_s) {
    this.#anchor(time_s, performance.now());
    this.#wanted_s = this.#silent ? null : time_s;
    if (!this.#silent && this.#audio.readyState > 0) this.#goToWanted();
  }

  speed(next) {
    this.#anchor(this.at_s, performance.now());
    this.#rate = next;
    this.#audio.playbackRate = next;
  }

  #predicted(now) {
    return this.#base_s + (this.#running ? (Math.max(0, now - this.#base_ms) / 1000) * this.#rate : 0);
  }

  #anchor(time_s, now) {
    this.#base_s = time_s;
    this.#base_ms = now;
  }

  #followSound(now) {
    const told_s = this.#audio.currentTime;
    if (this.#audio.readyState < this.#audio.HAVE_FUTURE_DATA) {
      this.#anchor(told_s, now);
    } else if (told_s !== this.#heard_s) {
      const off_s = told_s - this.#predicted(now);
      this.#anchor(Math.abs(off_s) > JUMP_S ? told_s : this.#predicted(now) + DRAW_IN * off_s, now);
      this.#heard_s = told_s;
      this.#heard_ms = now;
    } else if (now - this.#heard_ms > STALL_MS) {
      this.#anchor(told_s, now);
    }
  }

  #goToWanted() {
    if (this.#wanted_s !== null) this.#audio.currentTime = Math.min(this.#wanted_s, this.#audio.duration || this.#wanted_s);
  }

  #goSilent() {
    if (this.#address === null || this.#silent) return;
    this.#anchor(this.at_s, performance.now());
    this.#silent = true;
    this.#wanted_s = null;
    this.#on.onSilent();
  }

  #play() {
    this.#audio.playbackRate = this.#rate;
    this.#audio.preservesPitch = true;
    this.#audio.play().catch((refusal) => refusal.name !== "AbortError" && this.#goSilent());
  }
}
