// The part of the page in which a reader ticks choices and counts and figures follow.
(function () {
  "use strict";
  var words = window.crosswindSelection;
  var SVG = "http://www.w3.org/2000/svg";

  // Names from data go into the page as text only, through here.
  function make(tag, kind, text) {
    var made = document.createElement(tag);
    if (kind) { made.className = kind; }
    if (text !== undefined) { made.textContent = text; }
    return made;
  }

  function put(parent) {
    for (var i = 1; i < arguments.length; i += 1) { parent.appendChild(arguments[i]); }
    return parent;
  }

  function draw(parent, tag, attributes) {
    var drawn = document.createElementNS(SVG, tag);
    Object.keys(attributes).forEach(function (name) { drawn.setAttribute(name, attributes[name]); });
    parent.appendChild(drawn);
    return drawn;
  }

  function clear(element) {
    while (element.firstChild) { element.removeChild(element.firstChild); }
  }

  function at(share) { return (100 * share).toFixed(3) + "%"; }

  function button(text, about, action) {
    var made = make("button", "", text);
    made.type = "button";
    if (about) { made.setAttribute("aria-label", about); }
    made.addEventListener("click", action);
    return made;
  }

  function Explorer(place, data, number, changed) {
    this.place = place;
    this.data = data;
    this.number = number;
    this.cube = window.crosswindCube.open(data);
    this.changed = changed;
    this.boxes = [];
    this.rows = [];
    this.heads = [];
    this.buttons = [];
    this.build();
    this.reset();
  }

  Explorer.prototype.build = function () {
    var self = this;
    var data = this.data;
    this.selected = make("p", "selected");
    this.live = make("p", "live");
    this.live.setAttribute("aria-live", "polite");
    this.more = make("p", "more");
    this.message = make("p", "message");
    this.message.setAttribute("role", "status");
    this.link = make("a", "", "Link to this selection");
    put(this.place, make("p", "hint", this.hint()), this.buildControls(), this.message,
      put(make("div", "result"), this.selected, this.live), this.more);
    this.place.appendChild(this.buildHead());
    data.axes.forEach(function (axis, a) { self.place.appendChild(self.buildAxis(axis, a)); });
    if (data.fixed.length) {
      put(this.place, make("p", "fixed", "Held at one choice: " + data.fixed.map(function (one) {
        return one.join(": ");
      }).join("; ") + "."));
    }
    this.ways = make("div", "ways");
    this.strips = make("div", "strips");
    put(this.place, this.ways, this.strips);
  };

  Explorer.prototype.hint = function () {
    var most = this.cube.most;
    var text = "Tick the choices to count. Every row shows the specifications with that choice, " +
      "under what is ticked on the other axes. " + (this.data.pooled
        ? "Dot: weighted share in which the finding survives; upright line: that of the whole " +
          "selection; counts are unweighted rows. "
        : "Counts are rows; this design pools no share. ") +
      "Diamond: the baseline’s choice. Only planned rows count. ";
    if (most < this.data.axes.length) {
      text += "This sweep has more combinations of choices than the page can hold, so choices " +
        "can be left out on " + (most === 1 ? "1 axis" : most + " axes") + " at a time.";
    }
    return text;
  };

  Explorer.prototype.buildControls = function () {
    var self = this;
    var data = this.data;
    var levels = put(make("fieldset", "levels"), make("legend", "", "Significance level"));
    this.radios = data.levels.map(function (level, l) {
      var radio = make("input");
      radio.type = "radio";
      radio.name = "level-" + self.number;
      radio.addEventListener("change", function () { self.update(true); });
      levels.appendChild(put(make("label", ""), radio,
        make("span", "", level + (l === data.level ? " (the plan’s)" : ""))));
      return radio;
    });
    this.baselineButton = button("Baseline’s choices only", "", function () { self.baseline(); });
    this.baselineButton.hidden = this.cube.most < data.axes.length ||
      data.axes.some(function (axis) { return axis.baseline < 0; });
    return put(make("div", "controls"), levels, put(make("div", "whole"),
      button("Start again", "", function () { self.reset(); self.changed(); }),
      this.baselineButton, this.link));
  };

  // Names of the columns; the rows say theirs in words that need no heading.
  Explorer.prototype.buildHead = function () {
    var head = make("div", "heads choice");
    head.setAttribute("aria-hidden", "true");
    var scale = make("span", "scale");
    if (this.data.pooled) {
      ["0%", "50%", "100%"].forEach(function (text) { scale.appendChild(make("span", "", text)); });
    }
    return put(head, make("span", "box"), make("span", "name", ""), scale,
      make("span", "counts", "survived of admissible"),
      make("span", "share", this.data.pooled ? "weighted share" : ""));
  };

  Explorer.prototype.buildAxis = function (axis, a) {
    var self = this;
    var group = put(make("fieldset", "axis"), make("legend", "", axis.name));
    var tools = make("div", "tools");
    this.buttons[a] = [["all", true], ["none", false]].map(function (one) {
      return button(one[0], one[0] + " of " + axis.name, function () {
        self.boxes[a].forEach(function (box) { box.checked = one[1]; });
        self.update(true);
      });
    });
    if (axis.baseline >= 0) {
      this.buttons[a].push(button("baseline’s", "baseline’s " + axis.name + " only", function () {
        self.boxes[a].forEach(function (box, c) { box.checked = c === axis.baseline; });
        self.update(true);
      }));
    }
    this.buttons[a].forEach(function (one) { tools.appendChild(one); });
    this.heads[a] = make("span", "note");
    put(tools, this.heads[a]);
    var list = make("div", "choices");
    this.boxes[a] = [];
    this.rows[a] = axis.choices.map(function (name, c) {
      var row = make("label", "choice");
      var box = make("input");
      box.type = "checkbox";
      box.addEventListener("change", function () { self.update(true); });
      self.boxes[a].push(box);
      var label = make("span", "name", name);
      if (c === axis.baseline) { put(label, make("span", "diamond", " ◆"), make("span", "spoken", "baseline")); }
      var track = document.createElementNS(SVG, "svg");
      track.setAttribute("class", "track");
      track.setAttribute("aria-hidden", "true");
      var counts = make("span", "counts");
      var share = make("span", "share");
      put(list, put(row, box, label, track, counts, share));
      return { row: row, track: track, counts: counts, share: share };
    });
    return put(group, tools, list);
  };

  Explorer.prototype.ticked = function () {
    return this.boxes.map(function (boxes) {
      return boxes.map(function (box) { return box.checked; });
    });
  };

  Explorer.prototype.level = function () {
    return this.radios.findIndex(function (radio) { return radio.checked; });
  };

  Explorer.prototype.reset = function () {
    this.set(this.data.axes.map(function (axis) {
      return axis.choices.map(function () { return true; });
    }), this.data.level);
  };

  Explorer.prototype.baseline = function () {
    this.set(this.data.axes.map(function (axis) {
      return axis.choices.map(function (_, c) { return c === axis.baseline; });
    }), this.level());
    this.changed();
  };

  Explorer.prototype.set = function (ticked, level) {
    this.boxes.forEach(function (boxes, a) {
      boxes.forEach(function (box, c) { box.checked = ticked[a][c]; });
    });
    this.radios.forEach(function (radio, l) { radio.checked = l === level; });
    this.message.textContent = "";
    this.update(false);
  };

  Explorer.prototype.isWhole = function () {
    return this.level() === this.data.level && this.ticked().every(function (flags) {
      return flags.indexOf(false) < 0;
    });
  };

  // Count what is ticked and show it everywhere.
  Explorer.prototype.update = function (told) {
    var self = this;
    var data = this.data;
    var ticked = this.ticked();
    var level = this.level();
    var found = this.cube.count(ticked, level);
    var total = found.whole;
    var other = level === data.level ? ""
      : " At " + data.levels[level] + " instead of the plan’s " + data.levels[data.level] + ".";
    this.selected.textContent = "Selected: " + words.inWords(data.axes, ticked) + other;
    this.live.textContent = words.headline(total, data, ticked);
    this.more.textContent = [words.losses(total), words.otherSign(total),
      data.sampled ? "These rows are a sample of the plan; the summary gives the interval of the " +
        "whole share." : ""].filter(Boolean).join(" ");
    this.place.classList.toggle("narrowed", !this.isWhole());
    found.split.forEach(function (split, a) {
      self.rows[a].forEach(function (row, c) {
        self.showRow(row, ticked[a][c], split && split[c], total.share);
      });
    });
    this.limit(ticked);
    this.showWays(total);
    this.showStrips(ticked, level);
    if (told) { this.message.textContent = ""; this.changed(); }
  };

  // Where the page has only smaller crosses, axes beyond their reach cannot be narrowed.
  Explorer.prototype.limit = function (ticked) {
    var self = this;
    if (this.cube.most >= this.data.axes.length) { return; }
    var own = ticked.filter(function (flags) { return flags.indexOf(false) >= 0; }).length;
    ticked.forEach(function (flags, a) {
      var shut = own >= self.cube.most && flags.indexOf(false) < 0;
      self.boxes[a].concat(self.buttons[a]).forEach(function (input) { input.disabled = shut; });
      self.heads[a].textContent = shut ? "tick everything on another axis first" : "";
    });
  };

  Explorer.prototype.showRow = function (row, on, total, whole) {
    row.row.classList.toggle("off", !on);
    clear(row.track);
    row.counts.textContent = total.admissible
      ? words.whole(total.survived) + " of " + words.whole(total.admissible) : "none admissible";
    row.share.textContent = this.data.pooled && total.admissible ? words.percent(total.share) : "";
    if (!this.data.pooled) { return; }
    ["0", "50%", "100%"].forEach(function (x) {
      draw(row.track, "line", { x1: x, x2: x, y1: "0", y2: "100%", "class": "rail" });
    });
    if (whole !== null) {
      draw(row.track, "line", { x1: at(whole), x2: at(whole), y1: "0", y2: "100%", "class": "whole" });
    }
    if (total.share === null) {
      draw(row.track, "circle", { cx: "0", cy: "50%", r: 1.5, "class": "absent" });
      return;
    }
    draw(row.track, "line", { x1: at(total.share), x2: "100%", y1: "50%", y2: "50%", "class": "fails" });
    draw(row.track, "line", { x1: "0", x2: at(total.share), y1: "50%", y2: "50%", "class": "survives" });
    draw(row.track, "circle", { cx: at(total.share), cy: "50%", r: 4, "class": "dot" });
  };

  Explorer.prototype.showWays = function (total) {
    var self = this;
    clear(this.ways);
    put(this.ways, make("h4", "", "Direction of the selected rows, signs aside"));
    var counts = [total.one_way, total.reverse, total.both_ways, total.neither, total.undetermined];
    if (!total.admissible) {
      put(this.ways, make("p", "", "No specification could be given a direction."));
      return;
    }
    counts.forEach(function (count, v) {
      if (!count && v === 4) { return; }
      var bar = document.createElementNS(SVG, "svg");
      bar.setAttribute("class", "bar");
      bar.setAttribute("aria-hidden", "true");
      draw(bar, "rect", { x: 0, y: "25%", width: at(count / total.admissible), height: "50%" });
      put(self.ways, put(make("p", "way"), make("span", "name", self.data.verdicts[v]), bar,
        make("span", "counts", words.ofWhole(count, total.admissible))));
    });
    put(this.ways, make("p", "note",
      "Failing to reject both ways is not evidence of independence."));
  };

  Explorer.prototype.showStrips = function (ticked, level) {
    clear(this.strips);
    window.crosswindStrips.show(this.strips, this, ticked, level);
  };

  window.crosswindExplorer = { Explorer: Explorer, make: make, put: put, draw: draw };
})();
