"use strict";
// What is read off a plot is a row of the table behind it.
for (const plot of document.querySelectorAll("figure.plot")) {
	const reader = plot.querySelector(".reader");
	const cursor = plot.querySelector(".cursor");
	const readout = plot.querySelector(".readout");
	const heads = [...plot.querySelectorAll("thead th")].map((h) => h.textContent);
	const rows = [...plot.querySelectorAll("tbody tr")];
	const places = rows.map((r) => Number(r.dataset.at));
	const down = plot.classList.contains("down");
	let now = -1;

	const show = (i) => {
		now = Math.min(Math.max(i, 0), rows.length - 1);
		const text = [...rows[now].cells].map((c, k) => heads[k] + ": " + c.textContent).join("; ");
		readout.textContent = text;
		reader.setAttribute("aria-valuenow", now + 1);
		reader.setAttribute("aria-valuetext", text);
		cursor.style[down ? "top" : "left"] = places[now] + "%";
		cursor.hidden = false;
	};
	const nearest = (at) => {
		let best = 0;
		places.forEach((p, i) => { if (Math.abs(p - at) < Math.abs(places[best] - at)) best = i; });
		return best;
	};
	const point = (e) => {
		const box = plot.querySelector(".picture").getBoundingClientRect();
		show(nearest(100 * (down ? (e.clientY - box.top) / box.height : (e.clientX - box.left) / box.width)));
	};
	reader.addEventListener("pointermove", point);
	reader.addEventListener("pointerdown", point);
	reader.addEventListener("focus", () => show(now < 0 ? nearest(50) : now));
	reader.addEventListener("keydown", (e) => {
		const far = Math.max(2, Math.round(rows.length / 10));
		const to = {
			ArrowRight: now + 1, ArrowUp: now + 1, ArrowLeft: now - 1, ArrowDown: now - 1,
			PageUp: now + far, PageDown: now - far, Home: 0, End: rows.length - 1,
		}[e.key];
		if (to === undefined) return;
		e.preventDefault();
		show(to);
	});
}
