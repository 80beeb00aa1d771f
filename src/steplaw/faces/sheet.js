// The size slider: what it shows is what the record's laws give at that size.
(() => {
  "use strict";
  const source = document.getElementById("laws");
  const form = document.querySelector("#live form");
  if (!source || !form) return;
  const laws = JSON.parse(source.textContent);
  const find = (id) => document.getElementById(id);
  const all = (selector) => [...document.querySelectorAll(selector)];
  const exact = laws.grade === "exact" || laws.grade === "proved";

  const grouped = (whole) => String(whole).replace(/\B(?=(\d{3})+(?!\d))/g, "\u202f");
  const raised = (power) => String(power).replace(/[-\d]/g, (c) => "⁰¹²³⁴⁵⁶⁷⁸⁹"[c] ?? "⁻");
  const powered = (mantissa, power) => `${mantissa} × 10${raised(power)}`;
  const rounded = (x) => {
    if (!Number.isFinite(x)) return "beyond reckoning";
    const size = Math.abs(x);
    if (size >= 1e15 || (size > 0 && size < 1e-3)) {
      const [mantissa, power] = x.toExponential(4).split("e");
      return powered(mantissa, Number(power));
    }
    if (size >= 1000) return grouped(Math.round(x));
    return String(Number(x.toPrecision(5)));
  };
  // The text of a value, and whether a digit of it was lost.
  const told = (found) => {
    if (found.none) return [found.none === "too long" ? "too long to write out" : "not settled here", "lost"];
    if ("float" in found) return [rounded(found.float), "rounded"];
    if (found.den !== 1n) return [rounded(Law.asFloat(found)), "fraction"];
    const digits = String(found.num < 0n ? -found.num : found.num);
    if (digits.length <= 24) return [(found.num < 0n ? "−" : "") + grouped(digits), "exact"];
    return [powered(`${digits[0]}.${digits.slice(1, 7)}`, digits.length - 1), "cut"];
  };
  const how = {
    exact: "to the last digit",
    fraction: "a fraction, shown to five figures",
    rounded: "worked out in doubles: rounded from the sixteenth figure on",
    cut: "worked out to the last digit, shown to seven figures",
    lost: "",
  };
  const time = (seconds) => {
    if (!Number.isFinite(seconds)) return "beyond reckoning";
    const units = [["years", 31557600], ["days", 86400], ["h", 3600], ["min", 60], ["s", 1], ["ms", 1e-3], ["µs", 1e-6]];
    const [unit, scale] = units.find(([, least]) => seconds >= least) ?? ["ns", 1e-9];
    const shown = seconds / scale;
    return `${shown >= 1e5 ? rounded(shown) : Number(shown.toPrecision(3))} ${unit}`;
  };
  const percent = (share) => {
    const value = 100 * share;
    if (!Number.isFinite(value)) return "–";
    if (value > 0 && value < 1) return "<1 %";
    if (value > 99 && value < 100) return `${Math.floor(value * 10) / 10} %`;
    return `${Math.round(value)} %`;
  };
  const at = (sizes) => Object.fromEntries(laws.names.map((name, place) => [name, sizes[place]]));
  const write = (id, text) => { find(id).textContent = text; };

  const where = (sizes) => {
    const below = sizes.some((size, place) => size < laws.start[place]);
    if (below) return `the law does not hold there: it starts at ${laws.start.join(", ")}`;
    const counted = laws.counted.find((row) => sizes.every((size, place) => row[place] === size));
    if (counted) {
      const [num, den = "1"] = counted[sizes.length].split("/");
      return `run: ${told({ num: BigInt(num), den: BigInt(den) })[0]} counted`;
    }
    const far = Math.max(...sizes.map((size, place) => size / Math.max(1, laws.largest[place])));
    if (far <= 1) return "not run, inside the range of the sizes run";
    return `extrapolated: ${far < 10 ? far.toFixed(1) : rounded(Math.round(far))} times the largest size run`;
  };
  const showTime = (steps) => {
    if (!laws.rate || !steps || steps.none) {
      write("live-time", "not told");
      write("live-rate", laws.rate ? "" : "no clock that follows the law");
      return;
    }
    const [low, high] = laws.rate.map((rate) => (Law.asFloat(steps) * rate) / 1e9);
    write("live-time", `${time(low)} to ${time(high)}`);
    write("live-rate", `at ${Number(laws.rate[0].toPrecision(3))} to ${Number(laws.rate[1].toPrecision(3))} ns a step`);
  };
  const showTerms = (sizes) => {
    const values = laws.terms.map((term) => (term ? Law.asFloat(Law.value(term, sizes)) : NaN));
    const total = values.reduce((sum, x) => sum + Math.abs(x), 0);
    all("[data-term]").forEach((output) => {
      output.textContent = percent(Math.abs(values[Number(output.dataset.term)]) / total);
    });
  };
  const showLines = (sizes, steps) => {
    const whole = steps ? Law.asFloat(steps) : NaN;
    all("tr[data-line]").forEach((row) => {
      const line = laws.lines[Number(row.dataset.line)];
      const [runs, count] = row.querySelectorAll("td.live");
      runs.textContent = line.frequency ? told(Law.value(line.frequency, sizes))[0] : "–";
      const found = line.steps && Law.value(line.steps, sizes);
      count.textContent = found ? told(found)[0] : "–";
      const share = found && !found.none ? Law.asFloat(found) / whole : NaN;
      row.querySelector(".share").textContent = percent(share);
      const drawn = Number.isFinite(share) ? Math.min(100, Math.max(0, 100 * share)) : 0;
      row.querySelector("rect.part").setAttribute("width", String(drawn));
    });
  };
  const showMarks = (sizes) => {
    all("path.mark").forEach((mark) => {
      const { way, low, high, left, width } = mark.dataset;
      const size = sizes[Number(way)];
      const inside = size >= Number(low) && size <= Number(high);
      mark.setAttribute("visibility", inside ? "visible" : "hidden");
      if (!inside) return;
      const part = Math.log(size / Number(low)) / Math.log(Number(high) / Number(low));
      mark.setAttribute("transform", `translate(${(Number(left) + part * Number(width)).toFixed(1)} 0)`);
    });
  };
  const show = (sizes) => {
    const named = at(sizes);
    const holds = sizes.every((size, place) => size >= laws.start[place]);
    const found = Law.value(laws.figure, named);
    const [text, kind] = told(found);
    write("live-figure", holds ? (exact ? text : `about ${text}`) : "no law");
    write("live-how", holds && exact ? how[kind] : "");
    if (laws.work) write("live-work", holds ? told(Law.value(laws.work, named))[0] : "no law");
    const steps = laws.steps && Law.value(laws.steps, named);
    showTime(holds && laws.timed ? Law.value(laws.timed, named) : null);
    write("live-where", where(sizes));
    showTerms(named);
    showLines(named, steps);
    showMarks(sizes);
    write("live-size", laws.names.map((name, place) => `${name} = ${grouped(sizes[place])}`).join(", "));
  };

  const sliders = laws.names.map((_, place) => find(`slide-${place}`));
  const boxes = laws.names.map((_, place) => find(`size-${place}`));
  const sizes = [...laws.largest];
  const set = (place, size, from) => {
    sizes[place] = size;
    if (from !== boxes[place]) boxes[place].value = String(size);
    const stops = laws.stops[place];
    const near = stops.reduce((best, stop, i) => (Math.abs(Math.log((stop + 1) / (size + 1)))
      < Math.abs(Math.log((stops[best] + 1) / (size + 1))) ? i : best), 0);
    if (from !== sliders[place]) sliders[place].value = String(near);
    sliders[place].setAttribute("aria-valuetext", `${laws.names[place]} = ${size}`);
    show(sizes);
  };
  laws.names.forEach((_, place) => {
    sliders[place].addEventListener("input", () => {
      set(place, laws.stops[place][Number(sliders[place].value)], sliders[place]);
    });
    boxes[place].addEventListener("input", () => {
      const size = Number(boxes[place].value);
      if (boxes[place].value !== "" && Number.isSafeInteger(size) && size >= 0 && size <= 1e9) {
        set(place, size, boxes[place]);
      }
    });
  });
  form.addEventListener("submit", (event) => event.preventDefault());
  all("#live [hidden], .live[hidden]").forEach((part) => { part.hidden = false; });
  document.querySelector("#live .no-script").hidden = true;
  laws.names.forEach((_, place) => set(place, sizes[place], null));
})();
