// A selection of choices in words and in the page's address; numbers as the report writes them.
(function () {
  "use strict";

  function whole(count) { return count.toLocaleString("en-US"); }

  // Never rounded to 0% or 100%.
  function percent(share) {
    if (share === null) { return "–"; }
    if (share <= 0) { return "0%"; }
    if (share >= 1) { return "100%"; }
    if (share < 0.01) { return "<1%"; }
    if (share > 0.99) { return ">99%"; }
    return Math.floor(100 * share + 0.5) + "%";
  }

  function counted(count, noun) { return whole(count) + " " + noun + (count === 1 ? "" : "s"); }

  function joined(parts) {
    if (parts.length < 2) { return parts.join(""); }
    return parts.slice(0, -1).join(", ") + " and " + parts[parts.length - 1];
  }

  function ofWhole(part, all) {
    return whole(part) + " of " + whole(all) + " (" + percent(part / all) + ")";
  }

  // What is ticked, axis by axis; an axis with everything ticked is not mentioned.
  function inWords(axes, ticked) {
    var parts = [];
    axes.forEach(function (axis, a) {
      var names = axis.choices.filter(function (_, c) { return ticked[a][c]; });
      var others = axis.choices.filter(function (_, c) { return !ticked[a][c]; });
      if (!others.length) { return; }
      var tally = " (" + names.length + " of " + axis.choices.length + ")";
      if (!names.length) { parts.push(axis.name + ": none"); return; }
      parts.push(axis.name + ": " + (others.length < names.length && others.length <= 3
        ? "all but " + others.join(", ") : names.join(", ")) + tally);
    });
    return parts.length ? parts.join("; ") + "." : "everything that was planned.";
  }

  function headline(total, data, ticked) {
    var bare = data.axes.filter(function (_, a) { return ticked[a].indexOf(true) < 0; });
    if (bare.length) {
      return "Nothing is selected: no choice is ticked under " +
        joined(bare.map(function (axis) { return axis.name; })) + ".";
    }
    if (!total.planned) { return "Nothing is selected: no planned row has these choices together."; }
    if (!total.admissible) {
      return "Nothing can be said: none of " + counted(total.planned, "selected row") +
        " is admissible.";
    }
    var text = "The finding survives in " + whole(total.survived) + " of " +
      counted(total.admissible, "selected row") + " (" +
      percent(total.survived / total.admissible) + ")";
    return text + (data.pooled ? "; weighted " + percent(total.share) + "." : ".");
  }

  function losses(total) {
    var parts = [
      [total.not_applicable, "not applicable"], [total.infeasible, "infeasible"],
      [total.failed, "failed"], [total.screened_out, "screened out"]
    ].filter(function (one) { return one[0] > 0; }).map(function (one) {
      return whole(one[0]) + " " + one[1];
    });
    if (!total.planned) { return ""; }
    if (!parts.length) {
      return total.planned === 1 ? "The 1 planned row is admissible."
        : "All " + counted(total.planned, "planned row") + " are admissible.";
    }
    return "Of " + counted(total.planned, "planned row") + ", " + whole(total.admissible) +
      (total.admissible === 1 ? " is" : " are") + " admissible; left out: " + joined(parts) + ".";
  }

  function otherSign(total) {
    if (!total.other_sign) { return ""; }
    return "In " + counted(total.other_sign, "row") + " the test rejects but the sum of the " +
      "coefficients has the other sign; " +
      (total.other_sign === 1 ? "it does" : "they do") + " not count as survived.";
  }

  // Places of the ticked choices, counted from 1, as "1-3.7"; "0" for none.
  function ranges(flags) {
    var parts = [];
    for (var i = 0; i < flags.length; i += 1) {
      if (flags[i]) {
        var start = i;
        while (flags[i + 1]) { i += 1; }
        parts.push(start === i ? String(i + 1) : (start + 1) + "-" + (i + 1));
      }
    }
    return parts.join(".") || "0";
  }

  // Flags for such a text; null where it is not one.
  function flagsOf(text, size) {
    var flags = new Array(size).fill(false);
    if (text === "0") { return flags; }
    var good = text.split(".").every(function (part) {
      var ends = /^([0-9]{1,6})(?:-([0-9]{1,6}))?$/.exec(part);
      if (!ends) { return false; }
      var low = Number(ends[1]), high = Number(ends[2] || ends[1]);
      if (low < 1 || high < low || high > size) { return false; }
      flags.fill(true, low - 1, high);
      return true;
    });
    return good ? flags : null;
  }

  // A check of what the places in an address stand for: 32 bits over all names in order.
  function check(all) {
    var text = JSON.stringify(all.map(function (data) { return [data.axes, data.levels]; }));
    var hash = 0x811c9dc5;
    for (var i = 0; i < text.length; i += 1) {
      hash = Math.imul(hash ^ text.charCodeAt(i), 0x01000193) >>> 0;
    }
    return ("0000000" + hash.toString(16)).slice(-8);
  }

  window.crosswindSelection = {
    whole: whole, percent: percent, counted: counted, ofWhole: ofWhole, joined: joined,
    inWords: inWords, headline: headline, losses: losses, otherSign: otherSign,
    ranges: ranges, flagsOf: flagsOf, check: check
  };
})();
