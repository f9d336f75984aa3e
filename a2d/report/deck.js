// Two recordings that run side by side on one clock; one of them is let through.
const FADE = 0.008; // seconds to silence and again from it, at every change, so that no change sounds unlike another

class Deck {
  constructor(context, first, second) {
    this.context = context;
    this.buffers = { A: first, B: second };
    this.level = new GainNode(context, { gain: 0 });
    this.gate = new GainNode(context, { gain: 1 });
    this.sides = { A: new GainNode(context, { gain: 1 }), B: new GainNode(context, { gain: 0 }) };
    this.sides.A.connect(this.gate);
    this.sides.B.connect(this.gate);
    this.gate.connect(this.level).connect(context.destination);
    this.sources = [];
    this.busyUntil = 0;
  }

  // Start both at the same sample, and repeat the passage from `from` to `to` (seconds).
  play(when, from, to) {
    this.stop();
    const rate = this.buffers.A.sampleRate;
    const start = Math.round(from * rate) / rate;
    const end = Math.round(to * rate) / rate;
    this.sources = ["A", "B"].map((side) => {
      const source = new AudioBufferSourceNode(this.context, {
        buffer: this.buffers[side], loop: true, loopStart: start, loopEnd: end,
      });
      source.connect(this.sides[side]);
      source.start(when, start);
      return source;
    });
  }

  stop() {
    for (const source of this.sources) {
      source.stop();
      source.disconnect();
    }
    this.sources = [];
  }

  // Let `side` through from `when` on; both keep running, so that the place in the music stays.
  select(side, when) {
    const at = Math.max(when, this.busyUntil);
    const gate = this.gate.gain;
    gate.setValueAtTime(1, at);
    gate.linearRampToValueAtTime(0, at + FADE);
    this.sides.A.gain.setValueAtTime(side === "A" ? 1 : 0, at + FADE);
    this.sides.B.gain.setValueAtTime(side === "B" ? 1 : 0, at + FADE);
    gate.setValueAtTime(0, at + FADE);
    gate.linearRampToValueAtTime(1, at + 2 * FADE);
    this.busyUntil = at + 2 * FADE;
  }

  setLevel(decibels, when) {
    this.level.gain.setTargetAtTime(10 ** (decibels / 20), when, 0.02);
  }
}
