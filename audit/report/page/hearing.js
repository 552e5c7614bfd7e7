"use strict";
{
	const section = document.querySelector("#hearing");
	const told = section.querySelector("#told");
	const sighted = section.querySelector("#sighted");
	const repeat = section.querySelector("#repeat");
	const start = section.querySelector("#blind");

	const make = (tag, attributes, ...children) => {
		const e = document.createElement(tag);
		for (const [name, value] of Object.entries(attributes)) e.setAttribute(name, value);
		e.append(...children);
		return e;
	};
	const button = (text, act) => {
		const b = make("button", { type: "button" }, text);
		b.addEventListener("click", act);
		return b;
	};

	// All players share one volume, so that levels stay matched, and one position: what
	// begins while another plays goes on where that was.
	const players = [];
	let volume = 0.2, muted = false, playing = null;
	const share = () => {
		for (const p of players) {
			if (p.volume !== volume) p.volume = volume;
			if (p.muted !== muted) p.muted = muted;
			p.loop = repeat.checked;
		}
	};
	const wire = (player) => {
		players.push(player);
		share();
		player.addEventListener("play", () => {
			if (playing && playing !== player && !playing.paused) {
				const at = playing.currentTime;
				playing.pause();
				player.currentTime = at;
			}
			playing = player;
		});
		player.addEventListener("volumechange", () => {
			if (player.volume === volume && player.muted === muted) return;
			({ volume, muted } = player);
			share();
		});
		return player;
	};
	const silence = () => players.forEach((p) => p.pause());
	repeat.addEventListener("change", share);
	section.querySelectorAll("audio").forEach(wire);

	// What was removed is made here: the original less the output, sample by sample.
	const scheme = "data:audio/wav;base64,";
	const decoded = (url) => {
		const text = atob(url.slice(scheme.length));
		const bytes = new Uint8Array(text.length);
		for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
		return new DataView(bytes.buffer);
	};
	const encoded = (view) => {
		const bytes = new Uint8Array(view.buffer);
		let text = "";
		for (let i = 0; i < bytes.length; i += 8192) text += String.fromCharCode(...bytes.subarray(i, i + 8192));
		return scheme + btoa(text);
	};
	// Samples stand in the chunk "data": each chunk has a name, a size and as many bytes.
	const samplesAt = (view) => {
		let at = 12;
		while (view.getUint32(at) !== 0x64617461) at += 8 + view.getUint32(at + 4, true);
		return at + 8;
	};
	const less = (original, output, ratio) => {
		const out = new DataView(original.buffer.slice(0));
		for (let at = samplesAt(original); at < out.byteLength; at += 2) {
			const v = Math.round(original.getInt16(at, true) - ratio * output.getInt16(at, true));
			out.setInt16(at, Math.min(Math.max(v, -32768), 32767), true);
		}
		return out;
	};
	const original = section.querySelector("#untreated audio").src;
	const untreated = decoded(original);
	const ways = [...section.querySelectorAll("tr.treated")].map((row) => {
		const label = row.cells[0].textContent;
		const output = row.querySelector("audio").src;
		const removed = make("audio", { controls: "", preload: "auto", "aria-label": "Removed: " + label,
			src: encoded(less(untreated, decoded(output), Number(row.dataset.ratio))) });
		row.querySelector(".removed").replaceChildren(wire(removed));
		return { label, gain: row.cells[1].textContent, output };
	});

	// Listening blind: what tells realisations apart leaves the document until the
	// tally is revealed. One by itself is held against the original.
	const hidden = ways.length > 1 ? ways : [{ label: "original", gain: "-", output: original }, ...ways];
	let order, votes, rounds;
	const below = (n) => { // a fair number under n
		const drawn = new Uint32Array(1);
		const fair = 2 ** 32 - 2 ** 32 % n;
		do crypto.getRandomValues(drawn); while (drawn[0] >= fair);
		return drawn[0] % n;
	};
	const names = hidden.map((_, i) => "Player " + String.fromCharCode(65 + i));
	const unnamed = names.map((name) => wire(make("audio", { controls: "", preload: "auto", "aria-label": name })));
	const shuffle = () => {
		silence();
		order = hidden.map((_, i) => i);
		for (let i = order.length - 1; i > 0; i--) {
			const k = below(i + 1);
			[order[i], order[k]] = [order[k], order[i]];
		}
		unnamed.forEach((p, i) => { p.src = hidden[order[i]].output; });
	};
	const vote = (i) => {
		rounds++;
		if (i >= 0) votes[order[i]]++;
		shuffle();
		told.textContent = `Round ${rounds} is counted. The players are shuffled again: this is round ${rounds + 1}.`;
	};
	const row = (name, player, ...rest) => make("tr", {}, make("th", { scope: "row" }, name), make("td", {}, player), make("td", {}, ...rest));
	const reference = ways.length > 1 ? [row("Untreated", wire(make("audio", { controls: "", preload: "auto", "aria-label": "Untreated", src: original })))] : [];
	const table = make("table", { class: "players" }, make("caption", {}, "Players, shuffled in each round"),
		make("tbody", {}, ...reference, ...names.map((name, i) => row(name, unnamed[i], button("I prefer " + name.slice(-1), () => vote(i))))));
	const round = make("div", { class: "round", tabindex: "-1", role: "group", "aria-label": "Blind listening" },
		make("p", {}, "Which player is which is drawn anew in each round. Listen, then say which you prefer; go on for as many rounds as you like."),
		make("div", { class: "wide" }, table),
		make("p", {}, button("I have no preference", () => vote(-1)), " ", button("Reveal the tally", () => reveal())));

	// The probability that guessing alone would prefer one of so many players so often.
	const byChance = (players, most, judged) => {
		let tail = 0, term = (1 - 1 / players) ** judged;
		for (let n = 0; n <= judged; n++) {
			if (n >= most) tail += term;
			term *= (judged - n) / (n + 1) / (players - 1);
		}
		return Math.min(1, players * tail);
	};
	let tally = null;
	const reveal = () => {
		silence();
		const judged = votes.reduce((a, b) => a + b, 0);
		const line = (...texts) => make("tr", {}, ...texts.map((text, i) => i ? make("td", {}, text) : make("th", { scope: "row" }, text)));
		const times = (n) => n === 1 ? "1 time" : n + " times";
		const said = [`Last, ${names.map((name, i) => name + " was " + hidden[order[i]].label).join(", ")}.`];
		if (judged > 0) {
			const percent = 100 * byChance(hidden.length, Math.max(...votes), judged);
			said.push(`By guessing alone, one of them would be preferred as often with a probability of up to ${percent < 1 ? "1" : Math.round(percent)} %.`);
		}
		tally = make("div", { class: "tally", tabindex: "-1", role: "group", "aria-label": "Your tally" },
			make("table", {}, make("caption", {}, `Your tally of ${rounds === 1 ? "1 round" : rounds + " rounds"}`),
				make("tbody", {}, ...hidden.map((h, i) => line(h.label, "preferred " + times(votes[i]))), line("no preference", times(rounds - judged)))),
			...said.map((text) => make("p", {}, text)));
		round.replaceWith(tally, sighted);
		start.hidden = false;
		told.textContent = "The tally is revealed.";
		tally.focus();
	};
	start.addEventListener("click", () => {
		if (tally) tally.remove();
		votes = hidden.map(() => 0);
		rounds = 0;
		shuffle();
		sighted.replaceWith(round);
		start.hidden = true;
		told.textContent = "The players are shuffled: this is round 1.";
		round.focus();
	});
	start.hidden = ways.length === 0;
}
