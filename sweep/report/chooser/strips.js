// Survival over the positions of the selected windows, one strip an entry.
(function () {
  "use strict";
  var words = window.crosswindSelection;
  var make = window.crosswindExplorer.make;
  var put = window.crosswindExplorer.put;
  var draw = window.crosswindExplorer.draw;
  var SVG = "http://www.w3.org/2000/svg";

  // The tint of a share, between the steps that the page's style names.
  function tint(tints, share) {
    var place = Math.min(Math.max(share, 0), 1) * (tints.length - 1);
    var low = Math.min(Math.floor(place), tints.length - 2);
    var part = place - low;
    var mixed = [1, 3, 5].map(function (from) {
      var a = parseInt(tints[low].slice(from, from + 2), 16);
      var b = parseInt(tints[low + 1].slice(from, from + 2), 16);
      return ("0" + Math.round((1 - part) * a + part * b).toString(16)).slice(-2);
    });
    return "#" + mixed.join("");
  }

  function across(windows, day) {
    return (100 * (day - windows.from) / (windows.to - windows.from || 1)).toFixed(3);
  }

  function box(svg, windows, span, attributes) {
    var left = across(windows, span[0]);
    var rect = draw(svg, "rect", attributes);
    rect.setAttribute("x", left + "%");
    rect.setAttribute("width", (across(windows, span[1]) - left).toFixed(3) + "%");
    return rect;
  }

  function dates(pair) { return pair[0] + " to " + pair[1]; }

  function describe(entry, found) {
    var best = null, worst = null;
    found.forEach(function (one) {
      if (!one.admissible) { return; }
      var share = one.survived / one.admissible;
      if (best === null || share > best[0]) { best = [share, one.dates]; }
      if (worst === null || share < worst[0]) { worst = [share, one.dates]; }
    });
    if (best === null) { return entry.name + ": none admissible."; }
    if (found.length === 1) {
      return entry.name + ", " + dates(best[1]) + ": " + words.percent(best[0]) + ".";
    }
    return entry.name + ": from " + words.percent(worst[0]) + " (window " + dates(worst[1]) +
      ") to " + words.percent(best[0]) + " (window " + dates(best[1]) + ").";
  }

  function strip(entry, found, windows, tints) {
    var svg = document.createElementNS(SVG, "svg");
    svg.setAttribute("class", "strip");
    svg.setAttribute("role", "img");
    svg.setAttribute("aria-label", describe(entry, found));
    windows.ticks.forEach(function (tick) {
      var x = across(windows, tick[0]) + "%";
      draw(svg, "line", { x1: x, x2: x, y1: 0, y2: "100%", "class": "tick" });
    });
    entry.spans.forEach(function (span, k) {
      var one = found[k];
      if (!one.admissible) {
        draw(svg, "circle", { cx: across(windows, (span[0] + span[1]) / 2) + "%", cy: "50%", r: 1.2,
          "class": "absent" });
        return;
      }
      var share = one.survived / one.admissible;
      var cell = box(svg, windows, span, { y: entry.kind === "fixed" ? "25%" : 0,
        height: entry.kind === "fixed" ? "50%" : "100%", fill: tint(tints, share) });
      draw(cell, "title", {}).textContent = dates(one.dates) + ": " +
        words.ofWhole(one.survived, one.admissible);
    });
    entry.gaps.forEach(function (gap) {
      var left = box(svg, windows, gap, { y: "22%", height: "56%", "class": "gap" });
      draw(left, "title", {}).textContent = "left out";
    });
    return svg;
  }

  function legend(tints) {
    var made = put(make("p", "tints"), make("span", "", "Share surviving  0% "));
    var svg = draw(made, "svg", { "class": "swatches", "aria-hidden": "true" });
    tints.forEach(function (colour, k) {
      draw(svg, "rect", { x: 100 * k / tints.length + "%", y: 0, width: 100 / tints.length + "%",
        height: "100%", fill: colour });
    });
    return put(made, make("span", "", " 100%; small dot: none admissible; counts are unweighted " +
      "rows. Moving windows: a cell ends at the window’s last date (shrinking windows: starts at " +
      "the first); neighbouring windows share most of their data. White: left out."));
  }

  function years(windows) {
    var svg = document.createElementNS(SVG, "svg");
    svg.setAttribute("class", "years");
    svg.setAttribute("aria-hidden", "true");
    windows.ticks.forEach(function (tick) {
      var x = Number(across(windows, tick[0]));
      draw(svg, "text", { x: x + "%", y: 11,
        "text-anchor": x < 4 ? "start" : x > 96 ? "end" : "middle" }).textContent = tick[1];
    });
    return svg;
  }

  function show(place, explorer, ticked, level) {
    var windows = explorer.data.windows;
    if (!windows) { return; }
    put(place, make("h4", "", "When the finding holds, in the selected windows"));
    var counted = explorer.cube.overTime(ticked, level);
    if (counted === null) {
      put(place, make("p", "note", "This sweep has more combinations of choices than the page can " +
        "hold over time: tick everything on all but " + explorer.cube.mostOverTime +
        " of the axes beside the window to see this figure."));
      return;
    }
    var tints = windows.tints;
    var axis = explorer.cube.windowAxis;
    var from = 0, shown = 0;
    put(place, legend(tints));
    windows.entries.forEach(function (entry) {
      var found = entry.spans.map(function (_, k) {
        return { admissible: counted.admissible[from + k], survived: counted.survived[from + k],
          dates: entry.dates[k] };
      });
      from += entry.spans.length;
      if (axis >= 0 && !ticked[axis][entry.choice]) { return; }
      shown += 1;
      var sum = function (name) {
        return found.reduce(function (total, one) { return total + one[name]; }, 0);
      };
      var text = sum("admissible") ? words.ofWhole(sum("survived"), sum("admissible"))
        : "none admissible";
      if (entry.kind !== "fixed") { text += " in " + words.counted(entry.positions, "position"); }
      put(place, put(make("p", "entry"), make("span", "name", entry.name),
        make("span", "counts", text)), strip(entry, found, windows, tints));
    });
    put(place, shown ? years(windows) : make("p", "note", "No window is ticked."));
  }

  window.crosswindStrips = { show: show };
})();
