/* The ruler's two logarithmic axes and their ticks. */
(() => {
  "use strict";
  const corymb = (window.corymb = window.corymb || {});
  const parts = (corymb.rulerParts = corymb.rulerParts || {});

  /** A logarithmic scale from a stretch of numbers to a stretch of pixels. */
  function scale(low, high, from, to) {
    const start = Math.log(low);
    const extent = Math.log(high) - start || 1;
    const at = (value) => from + ((Math.log(value) - start) / extent) * (to - from);
    at.invert = (pixel) => Math.exp(start + ((pixel - from) / (to - from)) * extent);
    at.low = low;
    at.high = high;
    return at;
  }

  /** Round numbers inside a stretch: the given multiples of each power of ten. */
  function roundNumbers(low, high, multiples) {
    const numbers = [];
    for (let power = Math.floor(Math.log10(low)); power <= Math.ceil(Math.log10(high)); power += 1) {
      for (const multiple of multiples) {
        const value = Number(`${multiple}e${power}`);
        if (value >= low * 0.999 && value <= high * 1.001) numbers.push(value);
      }
    }
    return numbers;
  }

  const farEnough = (numbers, at, distance) => numbers.every(
    (value, index) => index === 0 || Math.abs(at(value) - at(numbers[index - 1])) >= distance,
  );

  /**
   * As many round numbers as stand at least `distance` pixels apart. A short stretch gets finer ones, so that even
   * half a decade has two or three.
   */
  function ticks(at, distance) {
    const choices = [[1], [1, 3], [1, 2, 5], [1, 2, 3, 5, 7]].map((multiples) => roundNumbers(at.low, at.high, multiples));
    const fitting = choices.filter((numbers) => farEnough(numbers, at, distance));
    const enough = fitting.find((numbers) => numbers.length >= 4);
    if (enough) return preferThirds(enough, fitting);
    if (fitting.length > 0) return fitting.reduce((one, two) => (two.length > one.length ? two : one));
    return thin(choices[0], at, distance);
  }

  /** Steps of three read best on a logarithmic axis: take them where they fit. */
  function preferThirds(enough, fitting) {
    const thirds = fitting[1];
    return thirds && thirds.length > enough.length && thirds.length <= 9 ? thirds : enough;
  }

  /** Every second number, or third …, until they stand apart. */
  function thin(numbers, at, distance) {
    for (let step = 2; step < numbers.length; step += 1) {
      const rest = numbers.filter((_, index) => index % step === 0);
      if (farEnough(rest, at, distance)) return rest;
    }
    return numbers.slice(0, 1);
  }

  /** A number as one would write it: no exponent, no trailing noughts. */
  function write(value) {
    return String(Number(value.toPrecision(3)));
  }

  parts.scale = { scale, ticks, write };
})();
