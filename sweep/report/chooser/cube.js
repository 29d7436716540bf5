// Counting any selection of choices from the cube that the page carries.
(function () {
  "use strict";
  var ALPHABET = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-_";
  var DIGIT = {};
  ALPHABET.split("").forEach(function (character, place) { DIGIT[character] = place; });
  var COUNTS = ["planned", "not_applicable", "infeasible", "failed", "screened_out", "admissible",
    "undetermined"];
  var AT_LEVEL = ["survived", "other_sign", "one_way", "reverse", "both_ways"];

  // One column of whole numbers: a number for all cells, or a text of digits of five bits.
  function column(packed, size) {
    var values = new Float64Array(size);
    if (typeof packed === "number") { return values.fill(packed); }
    var place = 0, value = 0, scale = 1;
    for (var i = 0; i < packed.length; i += 1) {
      var digit = DIGIT[packed[i]];
      value += (digit & 31) * scale;
      scale *= 32;
      if (digit < 32) { values[place] = value; place += 1; value = 0; scale = 1; }
    }
    return values;
  }

  // For each axis of a cross, the choice of every cell; "inner" counts faster than the axes.
  function choicesOf(cross, axes, inner) {
    var steps = column(cross.cell, cross.size);
    var found = cross.axes.map(function () { return new Int32Array(cross.size); });
    var positions = new Int32Array(cross.size);
    var number = -1;
    for (var i = 0; i < cross.size; i += 1) {
      number += steps[i];
      var rest = number;
      positions[i] = rest % inner;
      rest = Math.floor(rest / inner);
      for (var k = cross.axes.length - 1; k >= 0; k -= 1) {
        var many = axes[cross.axes[k]].choices.length;
        found[k][i] = rest % many;
        rest = Math.floor(rest / many);
      }
    }
    return { choices: found, positions: positions };
  }

  function openCross(cross, data) {
    return {
      axes: cross.axes,
      size: cross.size,
      choices: choicesOf(cross, data.axes, 1).choices,
      weight: column(cross.weight, cross.size),
      counts: COUNTS.map(function (name) { return column(cross.counts[name], cross.size); }),
      at: cross.at.map(function (level) {
        return AT_LEVEL.map(function (name) { return column(level[name], cross.size); });
      })
    };
  }

  function openPath(cross, data, positions) {
    var read = choicesOf(cross, data.axes, positions);
    return {
      axes: cross.axes,
      size: cross.size,
      choices: read.choices,
      positions: read.positions,
      admissible: column(cross.admissible, cross.size),
      survived: cross.survived.map(function (packed) { return column(packed, cross.size); })
    };
  }

  function empty(weights) {
    return {
      sums: new Float64Array(COUNTS.length + AT_LEVEL.length),
      admissible: new Float64Array(weights),
      survived: new Float64Array(weights)
    };
  }

  // Name the sums.  The weighted sums go from the smallest weight to the largest, as the
  // store's do, so that they have the same digits.
  function totals(found, weights) {
    var total = { weighted: 0, weightedSurvived: 0 };
    COUNTS.concat(AT_LEVEL).forEach(function (name, k) { total[name] = found.sums[k]; });
    weights.forEach(function (weight, k) {
      total.weighted += weight * found.admissible[k];
      total.weightedSurvived += weight * found.survived[k];
    });
    total.share = null;
    if (total.admissible > 0 && total.weighted > 0) {
      total.share = total.weightedSurvived / total.weighted;
      // Whole shares are read off the counts: a sum of fractions may miss them by its rounding.
      if (total.survived === 0) { total.share = 0; }
      if (total.survived === total.admissible) { total.share = 1; }
    }
    total.neither = total.admissible - total.undetermined - total.one_way - total.reverse -
      total.both_ways;
    return total;
  }

  function add(into, cross, cell, columns) {
    for (var k = 0; k < columns.length; k += 1) { into.sums[k] += columns[k][cell]; }
    into.admissible[cross.weight[cell]] += cross.counts[5][cell];
    into.survived[cross.weight[cell]] += columns[COUNTS.length][cell];
  }

  function narrowed(ticked) {
    var found = [];
    ticked.forEach(function (flags, axis) { if (flags.indexOf(false) >= 0) { found.push(axis); } });
    return found;
  }

  function smallest(crosses, axes) {
    var best = null;
    crosses.forEach(function (cross) {
      var holds = axes.every(function (axis) { return cross.axes.indexOf(axis) >= 0; });
      if (holds && (best === null || cross.size < best.size)) { best = cross; }
    });
    return best;
  }

  // Axes of a cross on which a cell is not ticked: none, one (its place), or several (-2).
  function missed(cross, ticked, cell) {
    var place = -1;
    for (var k = 0; k < cross.axes.length; k += 1) {
      if (!ticked[cross.axes[k]][cross.choices[k][cell]]) {
        if (place >= 0) { return -2; }
        place = k;
      }
    }
    return place;
  }

  function open(data) {
    var crosses = data.crosses.map(function (cross) { return openCross(cross, data); });
    var entries = data.windows ? data.windows.entries : [];
    var positions = entries.reduce(function (sum, entry) { return sum + entry.spans.length; }, 0);
    var paths = data.windows ? data.windows.crosses.map(function (cross) {
      return openPath(cross, data, positions);
    }) : [];
    var windowAxis = data.axes.map(function (axis) { return axis.name; }).indexOf("window");

    // Most axes that can be narrowed at once; all of them where the full cross is there.
    var held = crosses[0].axes.length;
    var most = held === data.axes.length ? held : held - 1;

    // Count a selection at one level: "whole" is what is ticked on every axis; "split" has, for
    // each axis, what every choice gives under what is ticked on the other axes, or null.
    function count(ticked, level) {
      var own = narrowed(ticked);
      var split = data.axes.map(function () { return null; });
      var whole = null;
      var jobs = [];
      data.axes.forEach(function (axis, a) {
        var cross = smallest(crosses, own.indexOf(a) >= 0 ? own : own.concat([a]));
        if (cross === null) { return; }
        split[a] = axis.choices.map(function () { return empty(data.weights.length); });
        if (jobs.indexOf(cross) < 0) { jobs.push(cross); }
        cross.wanted = (cross.wanted || []).concat([a]);
      });
      var first = smallest(crosses, own);
      if (first !== null && jobs.indexOf(first) < 0) { jobs.push(first); }
      jobs.forEach(function (cross) {
        var columns = cross.counts.concat(cross.at[level]);
        var wanted = cross.wanted || [];
        cross.wanted = [];
        if (cross === first) { whole = empty(data.weights.length); }
        for (var cell = 0; cell < cross.size; cell += 1) {
          var miss = missed(cross, ticked, cell);
          if (miss === -2) { continue; }
          if (miss === -1 && cross === first) { add(whole, cross, cell, columns); }
          for (var k = 0; k < cross.axes.length; k += 1) {
            if ((miss === -1 || miss === k) && wanted.indexOf(cross.axes[k]) >= 0) {
              add(split[cross.axes[k]][cross.choices[k][cell]], cross, cell, columns);
            }
          }
        }
      });
      return {
        whole: totals(whole, data.weights),
        split: split.map(function (found) {
          return found && found.map(function (one) { return totals(one, data.weights); });
        })
      };
    }

    // Count the positions of all window entries under what is ticked on the other axes; null
    // where the page has no cross of these axes.
    function overTime(ticked, level) {
      var own = narrowed(ticked).filter(function (axis) { return axis !== windowAxis; });
      var cross = smallest(paths, own);
      if (cross === null) { return null; }
      var found = { admissible: new Float64Array(positions), survived: new Float64Array(positions) };
      for (var cell = 0; cell < cross.size; cell += 1) {
        if (missed(cross, ticked, cell) === -1) {
          found.admissible[cross.positions[cell]] += cross.admissible[cell];
          found.survived[cross.positions[cell]] += cross.survived[level][cell];
        }
      }
      return found;
    }

    return {
      most: most,
      mostOverTime: paths.length ? paths[0].axes.length : 0,
      windowAxis: windowAxis,
      count: count,
      overTime: overTime
    };
  }

  window.crosswindCube = { open: open };
})();
