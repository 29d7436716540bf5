// Starts every chooser of the page and keeps its selections in the page's address.
(function () {
  "use strict";
  var words = window.crosswindSelection;
  var all = [];
  var mark = "";

  // "#choose=CHECK&1.level=10&1.lags=1-3.7": only what differs from the whole plan is named.
  function address() {
    var parts = [];
    all.forEach(function (one) {
      if (one.level() !== one.data.level) {
        parts.push(one.number + ".level=" + one.data.levels[one.level()].replace("%", ""));
      }
      one.ticked().forEach(function (flags, a) {
        if (flags.indexOf(false) >= 0) {
          parts.push(one.number + "." + one.data.axes[a].name + "=" + words.ranges(flags));
        }
      });
    });
    return parts.length ? "#choose=" + mark + "&" + parts.join("&") : "";
  }

  function save() {
    var hash = address();
    all.forEach(function (one) { one.link.setAttribute("href", hash || "#choose-" + one.number); });
    if (hash === location.hash || (!hash && location.hash.indexOf("#choose=") !== 0)) { return; }
    history.replaceState(null, "", hash || "#");
  }

  // Read one part of an address into the state of the explorers; false where it makes no sense.
  function readPart(part, states) {
    var found = /^([0-9]+)\.([a-z]+)=([0-9.-]+)$/.exec(part);
    var place = found ? all.findIndex(function (one) { return String(one.number) === found[1]; }) : -1;
    if (place < 0) { return false; }
    var data = all[place].data;
    if (found[2] === "level") {
      states[place].level = data.levels.indexOf(found[3] + "%");
      return states[place].level >= 0;
    }
    var axis = data.axes.findIndex(function (one) { return one.name === found[2]; });
    var flags = axis < 0 ? null : words.flagsOf(found[3], data.axes[axis].choices.length);
    if (flags === null) { return false; }
    states[place].ticked[axis] = flags;
    return true;
  }

  function load() {
    if (location.hash.indexOf("#choose=") !== 0) { return; }
    var parts = location.hash.slice("#choose=".length).split("&");
    all.forEach(function (one) { one.reset(); });
    var states = all.map(function (one) { return { ticked: one.ticked(), level: one.data.level }; });
    var good = parts[0] === mark && parts.slice(1).every(function (part) {
      return readPart(part, states);
    });
    good = good && states.every(function (state, place) {
      var own = state.ticked.filter(function (flags) { return flags.indexOf(false) >= 0; }).length;
      return own <= all[place].cube.most;
    });
    if (!good) {
      all.forEach(function (one) {
        one.message.textContent = "The link was made for another report, so what it selects is " +
          "not shown; everything is ticked.";
      });
      return;
    }
    var first = null;
    states.forEach(function (state, place) {
      all[place].set(state.ticked, state.level);
      if (first === null && !all[place].isWhole()) { first = all[place]; }
    });
    if (first !== null) { first.place.scrollIntoView(); }
  }

  Array.prototype.forEach.call(document.querySelectorAll(".chooser"), function (place) {
    var number = Number(place.getAttribute("data-finding"));
    var data = JSON.parse(document.getElementById("cube-" + number).textContent);
    place.hidden = false;
    all.push(new window.crosswindExplorer.Explorer(place, data, number, save));
  });
  mark = words.check(all.map(function (one) { return one.data; }));
  load();
  save();
  window.addEventListener("hashchange", function () { load(); save(); });
  document.documentElement.setAttribute("data-choosers", String(all.length));
})();
