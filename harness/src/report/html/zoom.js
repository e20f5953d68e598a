// Zoom and pan for the timing diagrams. Without this script each diagram stays as it was drawn.
"use strict";
(function () {
  var LEAST = 20; // nanoseconds
  var UNITS = [["s", 1e9], ["ms", 1e6], ["us", 1e3], ["ns", 1]];
  var loaded = {};

  function sums(differences) {
    var sum = 0;
    return differences.map(function (difference) { return (sum += difference); });
  }

  function waves(id) {
    if (!loaded[id]) {
      var data = JSON.parse(document.getElementById(id).textContent);
      data.edges = sums(data.edges);
      data.runs.forEach(function (run) {
        run.at = function (tick) { return run.phase + tick * run.period; };
        run.sampled = sums(run.sampled).map(run.at);
        run.output = sums(run.output).map(run.at);
        run.state_ticks = sums(run.state_ticks).map(run.at);
      });
      loaded[id] = data;
    }
    return loaded[id];
  }

  // How many of the rising numbers are at most `value`.
  function upTo(rising, value) {
    var low = 0, high = rising.length;
    while (low < high) {
      var middle = (low + high) >> 1;
      if (rising[middle] <= value) low = middle + 1; else high = middle;
    }
    return low;
  }

  function px(at) { return (Math.round(at * 10) / 10).toString(); }

  function unitOf(ns) {
    return UNITS.find(function (unit) { return Math.abs(ns) >= 1.5 * unit[1]; }) || UNITS[3];
  }

  // Three digits, rounded up where the time must not be understated.
  function shown(ns, up) {
    var unit = UNITS.find(function (unit) { return ns >= unit[1]; }) || UNITS[3];
    var value = ns / unit[1], step = Math.pow(10, Math.max(Math.floor(Math.log10(value || 1)) - 2, -9));
    if (up) value = Math.ceil(value / step - 1e-9) * step;
    return Number(value.toPrecision(3)) + " " + unit[0];
  }

  function ticks(from, until, most) {
    var least = (until - from) / most;
    var power = Math.pow(10, Math.floor(Math.log10(least)));
    var step = [1, 2, 5, 10].map(function (n) { return n * power; })
      .find(function (n) { return n >= least * (1 - 1e-9); }) || power * 10;
    var values = [];
    for (var at = Math.ceil(from / step - 1e-9); at <= Math.floor(until / step + 1e-9); at++) values.push(at * step);
    return { values: values, step: step };
  }

  function Diagram(picture) {
    var view = JSON.parse(picture.dataset.view);
    this.picture = picture;
    this.svg = picture.querySelector("svg");
    this.drawn = this.svg.querySelector(".drawn");
    this.data = waves(picture.dataset.waves);
    var start = this.data.start;
    this.home = [view[0] - start, view[1] - start, view[2] - start];
    this.from = this.home[0];
    this.until = this.home[1];
    this.zero = this.home[2];
    this.run = this.data.runs[view[3]] || this.data.runs[0];
    this.pointers = new Map();
    this.controls();
    this.listen();
    this.draw();
  }

  Diagram.prototype.x = function (at) {
    var margin = this.data.lanes.margin;
    var part = (at - this.from) / (this.until - this.from);
    return margin + Math.min(1, Math.max(0, part)) * (this.width - 2 * margin);
  };

  // Zooms by a factor about a place between 0 and 1, or moves by a part of the width.
  Diagram.prototype.zoom = function (factor, about) {
    var span = this.until - this.from, length = this.data.length;
    var wanted = Math.min(Math.max(span * factor, LEAST), length);
    this.show(this.from + (span - wanted) * about, wanted);
  };

  Diagram.prototype.move = function (part) {
    var span = this.until - this.from;
    this.show(this.from + span * part, span);
  };

  Diagram.prototype.show = function (from, span) {
    this.from = Math.min(Math.max(from, 0), Math.max(0, this.data.length - span));
    this.until = this.from + span;
    this.draw();
  };

  Diagram.prototype.reset = function () {
    this.zero = this.home[2];
    this.show(this.home[0], this.home[1] - this.home[0]);
  };

  Diagram.prototype.all = function () { this.show(0, this.data.length); };

  // To the next or the previous operation, keeping the zoom where it shows it well.
  Diagram.prototype.step = function (by) {
    var changes = this.data.changes, zero = this.zero;
    var at = changes.map(function (change) { return change[0]; });
    var index = by > 0 ? upTo(at, zero) : upTo(at, zero - 1) - 1;
    if (index < 0 || index >= at.length) return;
    var span = Math.min(this.until - this.from, this.home[1] - this.home[0]);
    this.zero = at[index];
    this.show(this.zero - span * 0.2, span);
  };

  Diagram.prototype.wave = function (edges, closed, lane, className) {
    var first = upTo(edges, this.from), end = upTo(edges, this.until), self = this;
    var level = function (n) { return lane[(n % 2 === 1) === closed ? 1 : 0]; };
    var path = "M" + px(this.x(this.from)) + " " + px(level(first));
    var dense = "";
    if (end - first < 4 * this.width) {
      for (var n = first; n < end; n++) path += "H" + px(self.x(edges[n])) + "V" + px(level(n + 1));
    } else {
      // More edges than columns: a column with several is filled.
      var perColumn = (this.until - this.from) / this.width, at = first;
      while (at < end) {
        var next = Math.max(upTo(edges, edges[at] + perColumn), at + 1);
        var x = this.x(edges[at]);
        if (next - at > 1) dense += "M" + px(x) + " " + lane[0] + "h1v" + (lane[1] - lane[0]) + "h-1z";
        path += "H" + px(x) + "V" + px(level(next));
        at = next;
      }
    }
    path += "H" + px(this.x(this.until));
    return (dense ? '<path class="dense" d="' + dense + '"/>' : "") +
      '<path class="wave ' + className + '" d="' + path + '"/>';
  };

  Diagram.prototype.name = function (text, top) {
    return '<text class="lane" x="' + px(this.data.lanes.margin) + '" y="' + px(top - 7) + '">' + text + "</text>";
  };

  Diagram.prototype.axis = function () {
    var lanes = this.data.lanes, zero = this.zero, out = "";
    var unit = unitOf(this.until - this.from);
    var marks = ticks(this.from - zero, this.until - zero, Math.max(2, Math.floor(this.width / 90)));
    var decimals = Math.min(9, Math.max(0, -Math.floor(Math.log10(marks.step / unit[1] * 1.000001))));
    var last = -1e9;
    for (var index = 0; index < marks.values.length; index++) {
      var value = marks.values[index], at = this.x(value + zero);
      var text = (value / unit[1]).toFixed(decimals).replace(/^-(0(\.0*)?)$/, "$1");
      out += '<path class="rule" d="M' + px(at) + " " + px(lanes.contact[0]) + "V" + px(lanes.axis + 5) + '"/>';
      var half = text.length * 4.2;
      if (at - half > last + 6 && at - half > 0 && at + half < this.width) {
        out += '<text class="tick" x="' + px(at) + '" y="' + px(lanes.axis + 19) + '" text-anchor="middle">' + text + "</text>";
        last = at + half;
      }
    }
    return out + '<path class="axis" d="M' + px(this.x(this.from)) + " " + px(lanes.axis) + "H" + px(this.x(this.until)) + '"/>' +
      '<text class="axis-title" x="' + px(this.width / 2) + '" y="' + px(lanes.axis + 37) + '" text-anchor="middle">' +
      "time after the first edge, " + unit[0] + "</text>";
  };

  Diagram.prototype.bursts = function (lane) {
    var out = "", self = this;
    this.data.bursts.forEach(function (burst) {
      if (burst[1] <= self.from || burst[0] >= self.until || burst[1] === burst[0]) return;
      var left = self.x(burst[0]), right = self.x(burst[1]);
      out += '<rect class="' + (burst[2] ? "disturbance" : "bounce") + '" x="' + px(left) + '" y="' + px(lane[0] - 3) +
        '" width="' + px(Math.max(1, right - left)) + '" height="' + px(lane[1] - lane[0] + 6) + '"/>';
    });
    return out;
  };

  Diagram.prototype.samples = function (lane) {
    var run = this.run, closed = this.data.closed;
    var apart = (this.width - 2 * this.data.lanes.margin) * run.period / (this.until - this.from);
    if (apart < 5) return this.wave(run.sampled, closed, lane, "samples");
    var out = "", tick = Math.max(0, Math.ceil((this.from - run.phase) / run.period - 1e-9));
    for (; run.at(tick) <= this.until; tick++) {
      var at = px(this.x(run.at(tick)));
      var isClosed = (upTo(run.sampled, run.at(tick)) % 2 === 1) !== closed;
      out += '<path class="stroke" d="M' + at + " " + lane[0] + "V" + lane[1] + '"/><circle class="dot ' +
        (isClosed ? "closed" : "open") + '" cx="' + at + '" cy="' + (isClosed ? lane[0] : lane[1]) + '" r="3.5"/>';
    }
    return out;
  };

  Diagram.prototype.states = function (lane) {
    var run = this.run, index = upTo(run.state_ticks, this.from), end = upTo(run.state_ticks, this.until);
    var out = "", left = this.from, reached = -1;
    for (; index <= end; index++) {
      var state = index ? run.states[index - 1] : run.first;
      var right = index < end ? run.state_ticks[index] : this.until;
      var a = this.x(left), b = this.x(right), text = run.names[state];
      // States too short to be seen are not drawn one over the other.
      if (b > reached + 0.3 || index === end) {
        out += '<rect class="box ' + (run.closed[state] ? "closed" : "open") + '" x="' + px(a) + '" y="' + lane[0] +
          '" width="' + px(Math.max(0.5, b - a)) + '" height="' + (lane[1] - lane[0]) + '"/>';
        if (b - a > text.length * 7.5 + 6) {
          out += '<text class="in-box" x="' + px((a + b) / 2) + '" y="' + px(lane[1] - 6.5) + '" text-anchor="middle">' +
            text.replace(/&/g, "&amp;").replace(/</g, "&lt;") + "</text>";
        }
        reached = b;
      }
      left = right;
    }
    return out;
  };

  Diagram.prototype.latencies = function (bottom) {
    var out = "", self = this, last = -1e9;
    this.run.reports.forEach(function (report) {
      var change = self.data.changes[report[0]];
      if (!change) return;
      var until = self.run.at(report[1]);
      if (until < self.from || change[0] > self.until) return;
      var a = self.x(change[0]), b = self.x(until);
      // Farther out than a tenth of a second for each column, marks would run into one another.
      if (b - a < 0.5 && a - last < 3) return;
      last = a;
      var text = shown(Math.ceil(until - change[0]), true);
      out += '<g class="latency ' + change[1] + '"><path class="guide" d="M' + px(a) + " 10V" + px(bottom) + "M" + px(b) +
        " 10V" + px(bottom) + '"/><path class="measure" d="M' + px(a) + " 16H" + px(b) + '"/>';
      if (b - a > text.length * 8.1 + 14) {
        out += '<text class="measured" x="' + px((a + b) / 2) + '" y="20.5" text-anchor="middle">' + text + "</text>";
      }
      out += "</g>";
    });
    return out;
  };

  Diagram.prototype.draw = function (width) {
    var lanes = this.data.lanes;
    this.width = width || Math.max(240, Math.round(this.picture.clientWidth || 940));
    this.svg.setAttribute("viewBox", "0 0 " + this.width + " " + (lanes.axis + 46));
    var out = this.axis() + this.bursts(lanes.contact) + this.name("contact", lanes.contact[0]) +
      this.wave(this.data.edges, this.data.closed, lanes.contact, "contact");
    if (lanes.logic && this.run) {
      var samples = lanes.logic[0], states = lanes.logic[1], output = lanes.logic[2];
      out += this.name("samples", samples[0]) + this.samples(samples) + this.name("state", states[0]) +
        this.states(states) + this.name("output", output[0]) +
        this.wave(this.run.output, this.data.closed, output, "output") + this.latencies(output[1]);
    }
    this.drawn.innerHTML = out;
    var span = this.until - this.from;
    this.picture.dataset.from = this.from;
    this.picture.dataset.span = span;
    this.output.textContent = shown(span) + " from " + ((this.from + this.data.start) / 1e9).toFixed(6) + " s";
  };

  Diagram.prototype.controls = function () {
    var self = this, tools = document.createElement("div");
    tools.className = "tools";
    [
      ["\u2212", "Zoom out", function () { self.zoom(2, 0.5); }],
      ["+", "Zoom in", function () { self.zoom(0.5, 0.5); }],
      ["\u2190", "Move left", function () { self.move(-0.25); }],
      ["\u2192", "Move right", function () { self.move(0.25); }],
      ["Previous", "Previous operation", function () { self.step(-1); }],
      ["Next", "Next operation", function () { self.step(1); }],
      ["All", "Whole recording", function () { self.all(); }],
      ["Back", "Back to the first view", function () { self.reset(); }]
    ].forEach(function (tool) {
      var button = document.createElement("button");
      button.type = "button";
      button.textContent = tool[0];
      button.setAttribute("aria-label", tool[1]);
      button.title = tool[1];
      button.addEventListener("click", tool[2]);
      tools.appendChild(button);
    });
    this.output = document.createElement("output");
    tools.appendChild(this.output);
    this.picture.parentNode.insertBefore(tools, this.picture);
    this.picture.classList.add("live");
    this.picture.tabIndex = 0;
    this.picture.setAttribute("role", "group");
    this.picture.setAttribute("aria-label", this.picture.dataset.label +
      ": arrow keys move, plus and minus zoom, N and P go to the next and previous operation, A shows all, 0 goes back");
  };

  Diagram.prototype.key = function (event) {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    var self = this, actions = {
      ArrowLeft: function () { self.move(-0.1); }, ArrowRight: function () { self.move(0.1); },
      "+": function () { self.zoom(0.5, 0.5); }, "=": function () { self.zoom(0.5, 0.5); },
      "-": function () { self.zoom(2, 0.5); }, "_": function () { self.zoom(2, 0.5); },
      "0": function () { self.reset(); }, Home: function () { self.show(0, self.until - self.from); },
      End: function () { self.show(self.data.length, self.until - self.from); },
      n: function () { self.step(1); }, p: function () { self.step(-1); }, a: function () { self.all(); }
    };
    var action = actions[event.key] || actions[event.key.toLowerCase()];
    if (!action) return;
    event.preventDefault();
    action();
  };

  Diagram.prototype.listen = function () {
    var self = this, picture = this.picture, svg = this.svg;
    var place = function (clientX) {
      var box = svg.getBoundingClientRect();
      return (clientX - box.left) / box.width;
    };
    picture.addEventListener("keydown", function (event) { self.key(event); });
    picture.addEventListener("wheel", function (event) {
      // Until it has been clicked, the wheel scrolls the page as ever.
      if (!event.ctrlKey && !picture.contains(document.activeElement)) return;
      event.preventDefault();
      if (Math.abs(event.deltaX) > Math.abs(event.deltaY)) self.move(event.deltaX / self.width);
      else self.zoom(Math.exp(Math.max(-1, Math.min(1, event.deltaY / 240))), place(event.clientX));
    }, { passive: false });
    svg.addEventListener("pointerdown", function (event) {
      picture.focus({ preventScroll: true });
      svg.setPointerCapture(event.pointerId);
      self.pointers.set(event.pointerId, event.clientX);
    });
    svg.addEventListener("pointermove", function (event) {
      if (!self.pointers.has(event.pointerId)) return;
      var before = Array.from(self.pointers.values());
      self.pointers.set(event.pointerId, event.clientX);
      var after = Array.from(self.pointers.values());
      if (after.length === 1) { self.move(place(before[0]) - place(after[0])); return; }
      if (after.length !== 2) return;
      var apart = function (pair) { return Math.max(10, Math.abs(pair[0] - pair[1])); };
      self.move(place((before[0] + before[1]) / 2) - place((after[0] + after[1]) / 2));
      self.zoom(apart(before) / apart(after), place((after[0] + after[1]) / 2));
    });
    ["pointerup", "pointercancel"].forEach(function (name) {
      svg.addEventListener(name, function (event) { self.pointers.delete(event.pointerId); });
    });
    if (window.ResizeObserver) {
      new ResizeObserver(function () {
        if (Math.round(picture.clientWidth) !== self.width) self.draw();
      }).observe(picture);
    }
  };

  document.documentElement.classList.add("scripted");
  var all = Array.from(document.querySelectorAll("[data-view]")).map(function (picture) { return new Diagram(picture); });
  // On paper the columns are narrower than on most screens; letters keep their size.
  window.addEventListener("beforeprint", function () {
    all.forEach(function (diagram) { diagram.draw(diagram.picture.closest(".wide") ? 720 : 380); });
  });
  window.addEventListener("afterprint", function () { all.forEach(function (diagram) { diagram.draw(); }); });
})();
