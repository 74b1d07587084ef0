// The sound's own clock, made smooth: its time comes in steps, between which performance.now goes on.
// Without a sound that can be played the clock runs by itself.
const JUMP_S = 0.08; // what is farther off than this is a seek, not a step
const DRAW_IN = 0.15; // share of what is off that is made good at each step of the sound's clock
const STALL_MS = 250; // the sound's time stands still for longer: it waits for data

export function clockOf(audio, { onEnd, onSilent, onSound }) {
  let base_s = 0; // time of the sound at base_ms
  let base_ms = 0;
  let heard_s = -1; // the sound's time as it was read last, and when it changed
  let heard_ms = 0;
  let rate = 1;
  let running = false;
  let silent = true;
  let address = null;
  let wanted_s = null; // where a sound shall go on that is not there yet

  const predicted = (now) => base_s + (running ? (Math.max(0, now - base_ms) / 1000) * rate : 0);
  function anchor(time_s, now) {
    base_s = time_s;
    base_ms = now;
  }
  function goSilent() {
    if (address === null || silent) return;
    anchor(predicted(performance.now()), performance.now());
    silent = true;
    wanted_s = null;
    onSilent();
  }
  audio.addEventListener("error", goSilent);
  audio.addEventListener("ended", () => running && onEnd());
  audio.addEventListener("playing", onSound);
  audio.addEventListener("loadedmetadata", goToWanted);
  audio.addEventListener("seeked", () => {
    if (wanted_s === null) return;
    wanted_s = null;
    heard_s = -1;
  });

  function goTo(time_s) {
    anchor(time_s, performance.now());
    wanted_s = silent ? null : time_s;
    if (!silent && audio.readyState > 0) goToWanted();
  }
  function goToWanted() {
    if (wanted_s !== null) audio.currentTime = Math.min(wanted_s, audio.duration || wanted_s);
  }
  function playSound() {
    audio.playbackRate = rate;
    audio.preservesPitch = true;
    audio.play().catch((refusal) => refusal.name !== "AbortError" && goSilent());
  }

  return {
    // The time of the sound at a moment of performance.now, as smooth as the screen.
    read(now) {
      if (silent) return predicted(now);
      if (wanted_s !== null) {
        anchor(wanted_s, now); // the disc waits for the sound
        return wanted_s;
      }
      const told_s = audio.currentTime;
      if (audio.readyState < audio.HAVE_FUTURE_DATA) {
        anchor(told_s, now);
      } else if (told_s !== heard_s) {
        const off_s = told_s - predicted(now);
        anchor(Math.abs(off_s) > JUMP_S ? told_s : predicted(now) + DRAW_IN * off_s, now);
        heard_s = told_s;
        heard_ms = now;
      } else if (now - heard_ms > STALL_MS) {
        anchor(told_s, now);
      }
      return predicted(now);
    },
    at_s: () => (running && wanted_s === null ? predicted(performance.now()) : base_s),
    isSilent: () => silent,
    // Which sound; the place in it stays. Nothing is loaded before it is played.
    source(next) {
      if (next === undefined || next === address) return;
      address = next;
      silent = false;
      const here_s = predicted(performance.now());
      audio.src = next;
      goTo(here_s);
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
    seek: goTo,
    speed(next) {
      anchor(predicted(performance.now()), performance.now());
      rate = next;
      audio.playbackRate = next;
    },
  };
}
