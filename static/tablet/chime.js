/** Sound and vibration at the end of a wait. Both may be refused by the browser; the words on the screen never depend on them. */

/** Two short tones and two short buzzes. */
export function chime() {
  try { navigator.vibrate?.([300, 150, 300]); } catch { /* no motor */ }
  try {
    const audio = new AudioContext();
    for (const [at, pitch] of [[0, 880], [0.35, 660]]) {
      const tone = audio.createOscillator(), level = audio.createGain();
      tone.frequency.value = pitch;
      level.gain.setValueAtTime(0.3, audio.currentTime + at);
      level.gain.exponentialRampToValueAtTime(0.001, audio.currentTime + at + 0.3);
      tone.connect(level).connect(audio.destination);
      tone.start(audio.currentTime + at);
      tone.stop(audio.currentTime + at + 0.3);
    }
    setTimeout(() => audio.close(), 1500);
  } catch { /* no sound allowed before a touch */ }
}
