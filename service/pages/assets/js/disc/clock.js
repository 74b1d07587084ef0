// The sound's own clock, made smooth: its time comes in steps, between which performance.now goes on.
// Without a sound that can be played the clock runs by itself.
const JUMP_S = 0.08; // what is farther off than this is a seek, not a step
const DRAW_IN = 0.15; // share of what is off that is made good at each step of the sound's clock
const STALL_MS = 250; // the sound's time stands still for longer: it waits for data

export function clockOf(audio, { onEnd, onSilent }) {
  let base_s = 0; // time of the sound at base_ms
  let base_ms = 0;
  let heard_s = -1; // the sound's time as it was read last, and when it changed
  let heard_ms = 0;
  let rate = 1;
  let running = false;
  let silent = true;
  let address = null;

  const predicted = (now) => base_s + (running ? (Math.max(0, now - base_ms) / 1000) * rate : 0);
  function anchor(time_s, now) {
    base_s = time_s;
    base_ms = now;
  }
  function goSilent() {
    if (address === null || silent) return;
    anchor(predicted(performance.now()), performance.now());
    silent = true;
    onSilent();
  }
  audio.addEventListener("error", goSilent);
  audio.addEventListener("ended", () => running && onEnd());
  audio.addEventListener("loadedmetadata", () => { audio.currentTime = Math.min(base_s, audio.duration || base_s); });

  function playSound() {
    audio.playbackRate = rate;
    audio.preservesPitch = true;
    audio.play().catch((refusal) => refusal.name !== "AbortError" && goSilent());
  }

  return {
    // The time of the sound at a moment of performance.now, as smooth as the screen.
    read(now) {
      if (silent) return predicted(now);
      const told_s = audio.currentTime;
      if (told_s !== heard_s) {
        const off_s = told_s - predicted(now);
        anchor(Math.abs(off_s) > JUMP_S ? told_s : predicted(now) + DRAW_IN * off_s, now);
        heard_s = told_s;
        heard_ms = now;
      } else if (now - heard_ms > STALL_MS) {
        anchor(told_s, now);
      }
      return predicted(now);
    },
    at_s: () => base_s,
    // Which sound; the place in it stays. Nothing is loaded before it is played.
    source(next) {
      if (next === undefined || next === address) return;
      address = next;
      silent = false;
      anchor(predicted(performance.now()), performance.now());
      audio.src = next;
      if (running) playSound();
    },
    start() {
      running = true;
      anchor(base_s, performance.now());
      [heard_s, heard_ms] = [-1, performance.now()];
      if (!silent) playSound();
    },
    stop() {
      anchor(predicted(performance.now()), performance.now());
      running = false;
      audio.pause();
    },
    seek(time_s) {
      anchor(time_s, performance.now());
      heard_s = -1;
      if (!silent && audio.readyState > 0) audio.currentTime = time_s;
    },
    speed(next) {
      anchor(predicted(performance.now()), performance.now());
      rate = next;
      audio.playbackRate = next;
    },
  };
}
