// Looks at a report as it is laid out, and says what is wrong with it.
(function () {
  "use strict";
  function told(element) { return JSON.stringify(element.textContent.trim().slice(0, 40)); }

  function isSeen(element) {
    // What stands in closed details has a place but is not shown.
    return element.checkVisibility() && getComputedStyle(element).visibility === "visible";
  }

  // Every stretch of text with the boxes of its lines.
  function texts() {
    var found = [], walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
    while (walker.nextNode()) {
      var node = walker.currentNode, parent = node.parentElement;
      if (!node.data.trim() || !isSeen(parent) || parent.closest("script, style, title, desc, .skip")) continue;
      var range = document.createRange();
      range.selectNodeContents(node);
      Array.from(range.getClientRects()).forEach(function (box) {
        if (box.width > 1 && box.height > 1) found.push({ node: node, parent: parent, box: box });
      });
    }
    return found;
  }

  function clipOf(parent) {
    var clip = parent.closest(".scroll, .picture, pre");
    return clip ? clip.getBoundingClientRect() : null;
  }

  // Two texts whose boxes share more than a hair.
  function overlaps() {
    var problems = [], all = texts().map(function (text) {
      var svg = !!text.parent.closest("svg"), box = text.box;
      // The box of a line of letters has room above and below that no letter fills.
      var inset = box.height * (svg ? 0.18 : 0.22);
      var clip = clipOf(text.parent);
      return {
        text: text,
        top: Math.max(box.top + inset, clip ? clip.top : -1e6), bottom: Math.min(box.bottom - inset, clip ? clip.bottom : 1e6),
        left: Math.max(box.left + 0.5, clip ? clip.left : -1e6), right: Math.min(box.right - 0.5, clip ? clip.right : 1e6)
      };
    }).filter(function (one) { return one.left < one.right && one.top < one.bottom; });
    all.sort(function (a, b) { return a.top - b.top; });
    for (var i = 0; i < all.length; i++) {
      for (var j = i + 1; j < all.length && all[j].top < all[i].bottom; j++) {
        var a = all[i], b = all[j];
        if (a.text.node !== b.text.node && a.left < b.right && b.left < a.right) {
          problems.push(told(a.text.parent) + " and " + told(b.text.parent) + " overlap");
        }
      }
    }
    return problems;
  }

  // Letters of a picture that reach beyond its edge.
  function clipped() {
    return Array.from(document.querySelectorAll("svg text")).filter(isSeen).filter(function (text) {
      var box = text.getBoundingClientRect(), svg = text.ownerSVGElement.getBoundingClientRect();
      return box.left < svg.left - 1 || box.right > svg.right + 1 || box.top < svg.top - 1 || box.bottom > svg.bottom + 1;
    }).map(function (text) { return told(text) + " is cut off by the edge of its picture"; });
  }

  function colour(text) {
    var parts = text.match(/[\d.]+/g);
    return parts && (parts.length < 4 || Number(parts[3]) > 0) ? parts.slice(0, 3).map(Number) : null;
  }

  // WCAG 2.2, "relative luminance" and "contrast ratio".
  function luminance(rgb) {
    var linear = rgb.map(function (channel) {
      var part = channel / 255;
      return part <= 0.04045 ? part / 12.92 : Math.pow((part + 0.055) / 1.055, 2.4);
    });
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2];
  }

  function groundOf(element) {
    for (var at = element; at; at = at.parentElement) {
      var found = colour(getComputedStyle(at).backgroundColor);
      if (found) return found;
    }
    return [255, 255, 255];
  }

  function faint() {
    var problems = new Set();
    texts().forEach(function (text) {
      var style = getComputedStyle(text.parent), svg = text.parent.closest("svg");
      var ink = colour(svg ? style.fill : style.color);
      if (!ink) return;
      var a = luminance(ink), b = luminance(groundOf(svg || text.parent));
      var ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
      if (ratio < 4.5) problems.add(told(text.parent) + " has a contrast of only " + ratio.toFixed(2) + ":1");
    });
    return Array.from(problems);
  }

  function wide() {
    var page = document.documentElement, over = page.scrollWidth - page.clientWidth;
    if (over <= 0) return [];
    var farthest = texts().reduce(function (a, b) { return b.box.right > a.box.right ? b : a; });
    return ["the page is " + over + " pixels wider than the window, as far as " + told(farthest.parent)];
  }

  // Parts that can be reached by keyboard have a name.
  function nameless() {
    return Array.from(document.querySelectorAll("a, button, [tabindex]")).filter(function (part) {
      return !(part.getAttribute("aria-label") || part.textContent.trim());
    }).map(function (part) { return "a <" + part.tagName.toLowerCase() + "> has no name"; });
  }

  function look() {
    return [overlaps, clipped, faint, wide, nameless].reduce(function (all, look) { return all.concat(look()); }, []);
  }

  // Once as it opens, once with everything unfolded.
  var folded = look();
  document.querySelectorAll("details").forEach(function (details) { details.open = true; });
  return Array.from(new Set(folded.concat(look())));
})()
