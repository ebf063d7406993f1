"use strict";

// A probability in percent, digit for digit as gatecheck/model/shown.py writes it.

const LEAST = decimalOf(0.001), MOST = decimalOf(99.999), NONE = decimalOf(0), WHOLE = decimalOf(100);

// The shortest text that reads back as this double, as a whole number times a power of ten.
function decimalOf(number, power = 0) {
  const [digits, exponent = "0"] = String(number).split("e");
  const [whole, fraction = ""] = digits.split(".");
  return { whole: BigInt(whole + fraction), power: Number(exponent) - fraction.length + power };
}

function compare(a, b) {
  const power = Math.min(a.power, b.power);
  const x = scaled(a, power), y = scaled(b, power);
  return x < y ? -1 : x > y ? 1 : 0;
}

function scaled(number, power) {
  return number.whole * 10n ** BigInt(number.power - power);
}

function leading(number) {
  return String(number.whole).length - 1 + number.power;
}

function rounded(number, digits) {
  if (number.whole === 0n) return NONE;
  const last = leading(number) - digits + 1, power = leading(number) >= 16 ? last : Math.min(0, last);
  if (power <= number.power) return { whole: scaled(number, power), power };
  const unit = 10n ** BigInt(power - number.power);
  return { whole: (2n * number.whole + unit) / (2n * unit), power };
}

function nearest(number, bars) {
  let digits = 2, found = rounded(number, digits);
  while (bars.some((bar) => compare(found, bar) !== compare(number, bar))) {
    digits += 1;
    found = rounded(number, digits);
  }
  return found;
}

function written(number) {
  if (number.whole === 0n) return "0";
  const digits = String(number.whole).replace(/0+$/, ""), first = leading(number);
  if (first < -7 || first >= 16) {
    const rest = digits.length > 1 ? `.${digits.slice(1)}` : "";
    return `${digits[0]}${rest}e${first < 0 ? "-" : "+"}${Math.abs(first)}`;
  }
  if (first < 0) return `0.${"0".repeat(-first - 1)}${digits}`;
  const whole = digits.slice(0, first + 1).padEnd(first + 1, "0"), rest = digits.slice(first + 1);
  return rest ? `${whole}.${rest}` : whole;
}

// The value is a probability; the limit is one too, or null.
function percent(value, limit) {
  const number = decimalOf(value, 2), bars = limit === null ? [] : [decimalOf(limit, 2)];
  const above = (a, b) => compare(a, b) > 0;
  if (above(number, NONE) && above(LEAST, number) && bars.every((bar) => !above(LEAST, bar))) return "<0.001 %";
  if (above(number, MOST) && above(WHOLE, number) && bars.every((bar) => !above(bar, MOST))) return ">99.999 %";
  return `${written(nearest(number, [NONE, WHOLE, ...bars]))} %`;
}
