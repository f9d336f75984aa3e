// The key of a run: drawn at random, sealed by a hash that is shown before the first trial, opened after the last.
const ROUND = []; // SHA-256 constants: 32 bits of the fractional parts of cube and square roots of primes (FIPS 180-4)
const START = [];
for (let n = 2; ROUND.length < 64; n += 1) {
  let prime = true;
  for (let d = 2; d * d <= n; d += 1) if (n % d === 0) prime = false;
  if (prime) {
    if (START.length < 8) START.push(fraction(n, 2));
    ROUND.push(fraction(n, 3));
  }
}

// floor(2^32 · frac(n^(1/power))), in whole numbers: the root of n·2^(32·power), its lowest 32 bits.
function fraction(n, power) {
  const target = BigInt(n) << BigInt(32 * power);
  let low = 0n;
  let high = 1n << 40n;
  while (high - low > 1n) {
    const middle = (low + high) >> 1n;
    if (middle ** BigInt(power) <= target) low = middle;
    else high = middle;
  }
  return Number(low & 0xffffffffn);
}

function sha256(text) {
  const bytes = new TextEncoder().encode(text);
  const blocks = (bytes.length + 9 + 63) >> 6;
  const view = new DataView(new ArrayBuffer(blocks * 64));
  bytes.forEach((byte, i) => view.setUint8(i, byte));
  view.setUint8(bytes.length, 0x80);
  view.setUint32(blocks * 64 - 4, bytes.length * 8);
  const state = START.slice();
  const turn = (x, n) => (x >>> n) | (x << (32 - n));
  for (let block = 0; block < blocks; block += 1) {
    const w = [];
    for (let i = 0; i < 64; i += 1) {
      if (i < 16) w.push(view.getUint32(block * 64 + 4 * i));
      else {
        const s0 = turn(w[i - 15], 7) ^ turn(w[i - 15], 18) ^ (w[i - 15] >>> 3);
        const s1 = turn(w[i - 2], 17) ^ turn(w[i - 2], 19) ^ (w[i - 2] >>> 10);
        w.push((w[i - 16] + s0 + w[i - 7] + s1) >>> 0);
      }
    }
    let [a, b, c, d, e, f, g, h] = state;
    for (let i = 0; i < 64; i += 1) {
      const one = h + (turn(e, 6) ^ turn(e, 11) ^ turn(e, 25)) + ((e & f) ^ (~e & g)) + ROUND[i] + w[i];
      const two = (turn(a, 2) ^ turn(a, 13) ^ turn(a, 22)) + ((a & b) ^ (a & c) ^ (b & c));
      [h, g, f, e, d, c, b, a] = [g, f, e, (d + one) >>> 0, c, b, a, (one + two) >>> 0];
    }
    [a, b, c, d, e, f, g, h].forEach((x, i) => { state[i] = (state[i] + x) >>> 0; });
  }
  return state.map((x) => x.toString(16).padStart(8, "0")).join("");
}

function drawSeal(trials) {
  const key = [...crypto.getRandomValues(new Uint8Array(trials))].map((byte) => (byte & 1 ? "B" : "A")).join("");
  const salt = [...crypto.getRandomValues(new Uint8Array(16))].map((b) => b.toString(16).padStart(2, "0")).join("");
  return { key, salt, hash: sha256(`${salt}:${key}`) };
}

// The chance of `correct` or more right answers out of `trials` by guessing: the sum of C(n, k)/2^n over k >= correct.
function chance(correct, trials) {
  let term = 1;
  let sum = 0;
  for (let k = 0; k <= trials; k += 1) {
    if (k >= correct) sum += term;
    term = (term * (trials - k)) / (k + 1);
  }
  return sum / 2 ** trials;
}

function fewest(trials, level) {
  let correct = trials + 1;
  while (correct > 0 && chance(correct - 1, trials) <= level) correct -= 1;
  return correct;
}
