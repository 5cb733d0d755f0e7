(function () {
  "use strict";
  var table = document.querySelector("table.compare");
  var heads = table ? table.querySelectorAll("thead th[data-mode]") : [];
  if (heads.length > 2) {
    var picks = document.createElement("p");
    picks.className = "picks";
    var chosen = ["One mode", "Other mode"].map(function (label) {
      var select = document.createElement("select");
      select.add(new Option("all modes", ""));
      heads.forEach(function (head) { select.add(new Option(head.textContent, head.dataset.mode)); });
      var holder = document.createElement("label");
      holder.append(label + " ", select);
      picks.append(holder);
      select.addEventListener("change", show);
      return select;
    });
    table.parentNode.before(picks);
  }
  function show() {
    var wanted = chosen.map(function (select) { return select.value; });
    var all = wanted.indexOf("") >= 0;
    table.querySelectorAll("[data-mode]").forEach(function (cell) {
      cell.classList.toggle("hidden", !all && wanted.indexOf(cell.dataset.mode) < 0);
    });
  }
  function unfold() {
    var target = location.hash && document.getElementById(location.hash.slice(1));
    for (var fold = target && target.closest("details"); fold; fold = fold.parentElement.closest("details")) {
      fold.open = true;
      target.scrollIntoView();
    }
  }
  window.addEventListener("hashchange", unfold);
  unfold();
  window.addEventListener("beforeprint", function () {
    document.querySelectorAll("details").forEach(function (fold) { fold.open = true; });
  });
})();
