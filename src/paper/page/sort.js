"use strict";
document.querySelectorAll("table.sortable").forEach(function (table) {
  var heads = Array.from(table.tHead.rows[0].cells);
  function sort(column) {
    var body = table.tBodies[0];
    var up = heads[column].getAttribute("aria-sort") !== "ascending";
    heads.forEach(function (h) { h.removeAttribute("aria-sort"); });
    heads[column].setAttribute("aria-sort", up ? "ascending" : "descending");
    function key(row) {
      var cell = row.cells[column];
      return cell.dataset.order === undefined ? cell.textContent : Number(cell.dataset.order);
    }
    var rows = Array.from(body.rows);
    rows.sort(function (a, b) {
      var x = key(a), y = key(b), numbers = typeof x === "number" && typeof y === "number";
      var order = numbers ? x - y : String(x).localeCompare(String(y), "en", { numeric: true });
      return up ? order : -order;
    });
    rows.forEach(function (row) { body.appendChild(row); });
  }
  heads.forEach(function (head, column) {
    head.addEventListener("click", function () { sort(column); });
    head.addEventListener("keydown", function (event) {
      if (event.key === "Enter" || event.key === " ") { event.preventDefault(); sort(column); }
    });
  });
});
// Doubts are folded on screen and must not be missing on paper.
window.addEventListener("beforeprint", function () {
  document.querySelectorAll("details").forEach(function (d) { d.open = true; });
});
