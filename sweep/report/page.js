// Replace each still drawing by the same figure with tooltips; where that fails, the still stays.
(function () {
  "use strict";
  var figures = Array.prototype.slice.call(document.querySelectorAll("figure[data-number]"));
  var drawn = 0;
  figures.forEach(function (figure) {
    var number = figure.getAttribute("data-number");
    var place = figure.querySelector(".moving");
    var text = document.getElementById("specification-" + number).textContent;
    var options = { actions: false, renderer: "svg", ast: true, tooltip: { theme: "custom" } };
    try {
      window.drawFigure(place, JSON.parse(text), options).then(function () {
        figure.classList.add("drawn");
        drawn += 1;
        document.documentElement.setAttribute("data-figures-drawn", String(drawn));
      }, function (reason) {
        place.textContent = "";
        figure.setAttribute("data-not-drawn", String(reason));
      });
    } catch (fault) {
      figure.setAttribute("data-not-drawn", String(fault));
    }
  });
})();

// Folded tables are open on paper.
(function () {
  "use strict";
  var opened = [];
  window.addEventListener("beforeprint", function () {
    opened = Array.prototype.filter.call(document.querySelectorAll("details.table"),
      function (one) { return !one.open; });
    opened.forEach(function (one) { one.open = true; });
  });
  window.addEventListener("afterprint", function () {
    opened.forEach(function (one) { one.open = false; });
    opened = [];
  });
})();
