// Works formulas out in the page: exactly where the formula is rational at that size, else as a
// double. The trees are those of steplaw.faces.tree; the rules are those of steplaw.law.evaluate.
const Law = (() => {
  "use strict";
  const MOST_BITS = 400000;
  const MOST_EXACT = 1500; // terms of a harmonic sum that are added as fractions
  const CONSTANTS = {
    E: Math.E, pi: Math.PI, GoldenRatio: (1 + Math.sqrt(5)) / 2, EulerGamma: 0.5772156649015329,
  };

  class TooLong extends Error {}
  class Unsettled extends Error {}

  const abs = (x) => (x < 0n ? -x : x);
  const bits = (x) => (x ? abs(x).toString(16).length * 4 : 0);
  const gcd = (a, b) => { for (a = abs(a), b = abs(b); b; [a, b] = [b, a % b]); return a; };
  const floorDiv = (a, b) => { const q = a / b; return a % b && (a < 0n) !== (b < 0n) ? q - 1n : q; };
  const isqrt = (x) => {
    if (x < 2n) return x;
    let guess = 1n << BigInt(Math.ceil((bits(x) + 1) / 2));
    for (;;) {
      const next = (guess + x / guess) >> 1n;
      if (next >= guess) return guess;
      guess = next;
    }
  };
  const double = (n, d) => {
    if (d === 1n) return Number(n);
    const shift = BigInt(Math.max(0, 70 + bits(d) - bits(n)));
    const scaled = (n << shift) / d;
    return shift < 1000n ? Number(scaled) / 2 ** Number(shift)
      : Number(scaled) / 2 ** 500 / 2 ** (Number(shift) - 500);
  };
  const ln = (x) => {
    const extra = Math.max(0, bits(x) - 900);
    return Math.log(Number(x >> BigInt(extra))) + extra * Math.LN2;
  };

  class Q {
    constructor(n, d = 1n) {
      if (d === 0n) throw new TooLong("division by nothing");
      if (d < 0n) { n = -n; d = -d; }
      const shared = d === 1n ? 1n : gcd(n, d);
      this.n = n / shared;
      this.d = d / shared;
      if (bits(this.n) > MOST_BITS) throw new TooLong();
    }
    get whole() { return this.d === 1n; }
    float() { return double(this.n, this.d); }
    floor() { return floorDiv(this.n, this.d); }
  }
  const q = (n, d = 1n) => new Q(BigInt(n), BigInt(d));
  const ZERO = q(0), ONE = q(1);
  const qadd = (a, b) => new Q(a.n * b.d + b.n * a.d, a.d * b.d);
  const qneg = (a) => new Q(-a.n, a.d);
  const qmul = (a, b) => new Q(a.n * b.n, a.d * b.d);
  const qdiv = (a, b) => new Q(a.n * b.d, a.d * b.n);
  const qpow = (a, k) => {
    const up = k < 0n ? -k : k;
    const size = Math.max(bits(a.n), bits(a.d));
    if (a.n !== 0n && !(abs(a.n) === 1n && a.d === 1n) && size * Number(up) > 4 * MOST_BITS) {
      throw new TooLong();
    }
    const small = abs(a.n) === 1n ? (up & 1n ? a.n : 1n) : a.n ** up;
    return k < 0n ? new Q(a.d ** up, small) : new Q(small, a.d ** up);
  };

  // A rational multiple of the logarithm of a whole number, and a ratio of two of these.
  class Log {
    constructor(factor, of) { this.factor = factor; this.of = of; }
    settled() {
      return this.of === 1n || this.factor.n === 0n ? ZERO : this.factor.float() * ln(this.of);
    }
    float() { return float(this.settled()); }
  }
  const root = (x) => {
    for (let k = bits(x); k > 1; k -= 1) {
      const near = Math.round(Math.exp(ln(x) / k));
      for (const r of [near - 1, near, near + 1]) {
        if (r > 1 && Number.isSafeInteger(r) && BigInt(r) ** BigInt(k) === x) return [BigInt(r), BigInt(k)];
      }
    }
    return [x, 1n];
  };
  const rationalRatio = (of, base) => {
    const [r, exponent] = root(base);
    let count = 0n, rest = of;
    while (r > 1n && rest % r === 0n) { rest /= r; count += 1n; }
    return rest === 1n ? new Q(count, exponent) : null;
  };
  class LogRatio {
    constructor(factor, of, base) { this.factor = factor; this.of = of; this.base = base; }
    float() { return (this.factor.float() * ln(this.of)) / ln(this.base); }
    settled() { return this.float(); }
    floor() {
      const { n: p, d } = this.factor;
      if (p < 0n) return -new LogRatio(qneg(this.factor), this.of, this.base).ceil();
      const power = this.of ** p;
      let guess = BigInt(Math.max(0, Math.floor(this.float()) - 1));
      while (this.base ** (d * (guess + 1n)) <= power) guess += 1n;
      return guess;
    }
    ceil() {
      return this.factor.n > 0n ? this.floor() + 1n
        : -new LogRatio(qneg(this.factor), this.of, this.base).floor();
    }
    powerOf(base) {
      if (base instanceof Q && base.whole && base.n >= 1n) {
        const shared = rationalRatio(base.n, this.base);
        const exponent = shared && qmul(shared, this.factor);
        if (exponent && exponent.whole) return qpow(new Q(this.of), exponent.n);
      }
      return float(base) ** this.float();
    }
  }
  const logRatio = (factor, of, base) => {
    if (of === 1n || factor.n === 0n) return ZERO;
    const shared = rationalRatio(of, base);
    return shared ? qmul(factor, shared) : new LogRatio(factor, of, base);
  };

  // a + b * sqrt(d) with rational a and b.
  class Surd {
    constructor(a, b, d) { this.a = a; this.b = b; this.d = d; }
    settled() { return this.b.n === 0n ? this.a : this.float(); }
    float() {
      const root = Math.sqrt(Number(this.d));
      if (this.a.n !== 0n && this.b.n !== 0n && this.a.n > 0n !== this.b.n > 0n) {
        const norm = qadd(qmul(this.a, this.a), qneg(qmul(qmul(this.b, this.b), new Q(this.d))));
        return norm.float() / (this.a.float() - this.b.float() * root);
      }
      return this.a.float() + this.b.float() * root;
    }
    inverse() {
      const norm = qadd(qmul(this.a, this.a), qneg(qmul(qmul(this.b, this.b), new Q(this.d))));
      return new Surd(qdiv(this.a, norm), qneg(qdiv(this.b, norm)), this.d);
    }
    times(o) {
      return new Surd(
        qadd(qmul(this.a, o.a), qmul(qmul(this.b, o.b), new Q(this.d))),
        qadd(qmul(this.a, o.b), qmul(this.b, o.a)), this.d);
    }
    power(k) {
      if (k < 0n) return this.inverse().power(-k);
      if (Number(k) * Math.log2(Math.max(2, Math.abs(this.float()))) > MOST_BITS) throw new TooLong();
      let out = new Surd(ONE, ZERO, this.d), base = this;
      for (; k; k >>= 1n, base = base.times(base)) if (k & 1n) out = out.times(base);
      return out;
    }
    floor() {
      const common = (this.a.d / gcd(this.a.d, this.b.d)) * this.b.d;
      const a = this.a.n * (common / this.a.d), b = this.b.n * (common / this.b.d);
      const under = b * b * this.d;
      let r = isqrt(under);
      if (b < 0n) r = -r - (r * r === under ? 0n : 1n);
      return floorDiv(a + r, common);
    }
    ceil() { return -new Surd(qneg(this.a), qneg(this.b), this.d).floor(); }
  }
  const squareRoot = (x) => {
    if (!(x instanceof Q) || x.n < 0n) return Math.sqrt(float(x));
    const under = x.n * x.d, r = isqrt(under);
    return r * r === under ? new Q(r, x.d) : new Surd(ZERO, new Q(1n, x.d), under);
  };

  const settle = (x) => (x instanceof Q || typeof x === "number" ? x : x.settled());
  const float = (x) => (typeof x === "number" ? x : x.float());
  const neg = (x) => {
    if (typeof x === "number") return -x;
    if (x instanceof Q) return qneg(x);
    if (x instanceof Log) return new Log(qneg(x.factor), x.of);
    if (x instanceof LogRatio) return new LogRatio(qneg(x.factor), x.of, x.base);
    return new Surd(qneg(x.a), qneg(x.b), x.d);
  };
  const surds = (a, b) => {
    const d = a instanceof Surd ? a.d : b instanceof Surd ? b.d : null;
    if (d === null) return null;
    const pair = [a, b].map((x) => (x instanceof Q ? new Surd(x, ZERO, d) : x));
    return pair.every((x) => x instanceof Surd && x.d === d) ? pair : null;
  };
  const add = (a, b) => {
    if (a instanceof Q && b instanceof Q) return qadd(a, b);
    if (a instanceof Log && b instanceof Log && a.of === b.of) return new Log(qadd(a.factor, b.factor), a.of);
    const pair = surds(a, b);
    if (pair) return new Surd(qadd(pair[0].a, pair[1].a), qadd(pair[0].b, pair[1].b), pair[0].d);
    return float(a) + float(b);
  };
  const mul = (a, b) => {
    if (a instanceof Q && b instanceof Q) return qmul(a, b);
    if (b instanceof Q && !(a instanceof Q)) [a, b] = [b, a];
    if (a instanceof Q) {
      if (b instanceof Log) return new Log(qmul(a, b.factor), b.of);
      if (b instanceof LogRatio) return a.n === 0n ? ZERO : new LogRatio(qmul(a, b.factor), b.of, b.base);
    }
    const pair = surds(a, b);
    return pair ? pair[0].times(pair[1]) : float(a) * float(b);
  };
  const div = (a, b) => {
    if (b instanceof Q) return a instanceof Q ? qdiv(a, b) : mul(a, qdiv(ONE, b));
    if (a instanceof Log && b instanceof Log) return logRatio(qdiv(a.factor, b.factor), a.of, b.of);
    const pair = surds(a, b);
    return pair ? pair[0].times(pair[1].inverse()) : float(a) / float(b);
  };
  const power = (a, k) => {
    if (k instanceof LogRatio) return k.powerOf(a);
    if (k instanceof Q) {
      if (k.whole) {
        if (a instanceof Q) return qpow(a, k.n);
        return a instanceof Surd ? a.power(k.n) : float(a) ** Number(k.n);
      }
      if (k.d === 2n && a instanceof Q && a.n >= 0n) return power(squareRoot(a), new Q(k.n));
    }
    return float(a) ** float(k);
  };
  const floorOf = (x) => (x instanceof Log || typeof x === "number" ? null : x.floor());
  const mod = (a, b) => {
    if (a instanceof Q && b instanceof Q) return qadd(a, qneg(qmul(b, new Q(qdiv(a, b).floor()))));
    const x = float(a), y = float(b);
    return x - y * Math.floor(x / y);
  };
  const rounded = (x, up) => {
    if (x instanceof Log) x = x.settled();
    if (typeof x !== "number") return new Q(up ? (x.ceil ? x.ceil() : -qneg(x).floor()) : floorOf(x));
    if (!Number.isFinite(x)) throw new TooLong();
    if (Math.abs(x - Math.round(x)) <= 1e-9 * Math.max(1, Math.abs(x))) throw new Unsettled();
    return new Q(BigInt(up ? Math.ceil(x) : Math.floor(x)));
  };
  const whole = (x, most) => {
    if (!(x instanceof Q) || !x.whole) throw new Unsettled();
    if (abs(x.n) > BigInt(most)) throw new TooLong();
    return Number(x.n);
  };

  const product = (low, high) => {
    if (high < low) return 1n;
    if (high - low < 8) { let out = 1n; for (let k = low; k <= high; k += 1) out *= BigInt(k); return out; }
    const middle = (low + high) >> 1;
    return product(low, middle) * product(middle + 1, high);
  };
  const binomial = (n, k) => {
    if (k.n < 0n || n.n < 0n || k.n > n.n) return ZERO;
    const least = whole(k.n * 2n > n.n ? qadd(n, qneg(k)) : k, 20000);
    let top = 1n, below = 1n;
    for (let i = 0; i < least; i += 1) { top *= n.n - BigInt(i); below *= BigInt(i + 1); }
    return new Q(top, below);
  };
  const sequence = (start, most, step) => (x) => {
    let state = start.map(BigInt);
    for (let k = whole(x, most); k > 0; k -= 1) state = step(state);
    return new Q(state[0]);
  };
  const fibonacci = sequence([0, 1], 50000, ([a, b]) => [b, a + b]);
  const harmonicSum = (low, high, order) => {
    if (low === high) return [1n, BigInt(low) ** order];
    const middle = (low + high) >> 1;
    const [a, b] = harmonicSum(low, middle, order), [c, d] = harmonicSum(middle + 1, high, order);
    return [a * d + c * b, b * d];
  };
  const harmonicKnown = new Map();
  const harmonic = (x, order = ONE) => {
    const n = whole(x, Number.MAX_SAFE_INTEGER), k = whole(order, 60);
    if (n < 1) return ZERO;
    if (n <= MOST_EXACT) {
      const key = `${n} ${k}`;
      if (!harmonicKnown.has(key)) harmonicKnown.set(key, new Q(...harmonicSum(1, n, BigInt(k))));
      return harmonicKnown.get(key);
    }
    // Euler-Maclaurin summation (Knuth, The Art of Computer Programming, vol. 1, 1.2.11.2).
    const tail = 1 / (2 * n ** k), correction = k / (12 * n ** (k + 1));
    if (k === 1) return Math.log(n) + 0.5772156649015329 + tail - correction;
    const zeta = { 2: Math.PI ** 2 / 6, 3: 1.2020569031595942, 4: Math.PI ** 4 / 90 }[k];
    if (zeta === undefined) throw new Unsettled();
    return zeta - 1 / ((k - 1) * n ** (k - 1)) + tail - correction;
  };
  const log = (x, base) => {
    if (base !== undefined) return div(log(x), log(base));
    return x instanceof Q && x.whole && x.n >= 1n ? new Log(ONE, x.n) : Math.log(float(x));
  };
  const choose = (sign) => (...xs) => xs.reduce((a, b) => (sign * (float(b) - float(a)) > 0 ? b : a));
  const FUNCTIONS = {
    log, harmonic, binomial, fibonacci, sqrt: squareRoot, Mod: mod,
    exp: (x) => Math.exp(float(x)),
    floor: (x) => rounded(x, false),
    ceiling: (x) => rounded(x, true),
    factorial: (x) => new Q(product(1, whole(x, 20000))),
    subfactorial: (x) => {
      let total = 1n;
      for (let k = 1, n = whole(x, 10000); k <= n; k += 1) total = total * BigInt(k) + (k % 2 ? -1n : 1n);
      return new Q(total);
    },
    catalan: (x) => qdiv(binomial(qmul(q(2), x), x), qadd(x, ONE)),
    lucas: sequence([2, 1], 50000, ([a, b]) => [b, a + b]),
    tribonacci: sequence([0, 1, 1], 50000, ([a, b, c]) => [b, c, a + b + c]),
    Abs: (x) => (float(x) < 0 ? neg(x) : x),
    Max: choose(1), Min: choose(-1),
  };
  // floor(e * n!) is the number of arrangements of any of n things, from n = 1 on.
  const arrangements = (x) => {
    let total = 1n;
    for (let k = 1, n = whole(x, 10000); k <= n; k += 1) total = total * BigInt(k) + 1n;
    return total;
  };
  const isEulerFactorial = ([kind, left, right] = []) => kind === "*" && left[0] === "c"
    && left[1] === "E" && right[0] === "call" && right[1] === "factorial";

  const holds = (node, at) => {
    const [kind, ...rest] = node;
    if (kind === "true") return true;
    if (kind === "not") return !holds(rest[0], at);
    if (kind === "and") return holds(rest[0], at) && holds(rest[1], at);
    if (kind === "or") return holds(rest[0], at) || holds(rest[1], at);
    const [a, b] = rest.map((x) => settle(work(x, at)));
    const sign = a instanceof Q && b instanceof Q ? Number(qadd(a, qneg(b)).n > 0n) - Number(qadd(a, qneg(b)).n < 0n)
      : Math.sign(float(a) - float(b));
    return { "<": sign < 0, "<=": sign <= 0, ">": sign > 0, ">=": sign >= 0, "==": sign === 0, "!=": sign !== 0 }[kind];
  };
  const work = (node, at) => {
    const [kind, left, right] = node;
    switch (kind) {
      case "q": return q(left, right);
      case "f": return left;
      case "v": return at[left];
      case "c": return CONSTANTS[left];
      case "neg": return neg(work(left, at));
      case "+": return add(work(left, at), work(right, at));
      case "-": return add(work(left, at), neg(work(right, at)));
      case "*": return mul(work(left, at), work(right, at));
      case "/": return div(work(left, at), work(right, at));
      case "^": return power(work(left, at), work(right, at));
      case "%": return mod(work(left, at), work(right, at));
      case "cases": {
        const found = node.slice(1).find(([condition]) => holds(condition, at));
        return found ? work(found[1], at) : NaN;
      }
      case "call": {
        if ((left === "floor" || left === "ceiling") && isEulerFactorial(right)) {
          return new Q(arrangements(work(right[2][2], at)) + (left === "floor" ? 0n : 1n));
        }
        return FUNCTIONS[left](...node.slice(2).map((x) => work(x, at)));
      }
      default: throw new Unsettled();
    }
  };

  // {num, den} as texts where the value is exact, {float} where it is rounded, {none} where it
  // is too long to write out or cannot be settled.
  const value = (tree, sizes) => {
    const at = {};
    for (const [name, size] of Object.entries(sizes)) at[name] = q(size);
    try {
      const out = settle(work(tree, at));
      return typeof out === "number" ? { float: out } : { num: out.n, den: out.d };
    } catch (fault) {
      if (fault instanceof TooLong || fault instanceof RangeError) return { none: "too long" };
      if (fault instanceof Unsettled) return { none: "unsettled" };
      throw fault;
    }
  };
  const asFloat = (found) => (found.none ? NaN : "float" in found ? found.float : double(found.num, found.den));
  return { value, asFloat };
})();
