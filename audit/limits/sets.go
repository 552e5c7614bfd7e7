package limits

// What a source does not say of the points between, and what it says.
const (
	ramped  = "linear in ms over log frequency"
	stepped = "steps; where two meet the smaller counts"
)

// sets are the named sets. Every row is of group-delay-thresholds.csv, j21.csv, g712.csv
// or temporal-masking.csv in testdata, whose README names the rows left out.
var sets = []Limit{
	audible("audibility",
		"late bands: Blauert and Laws 1978, JASA 63(5) 1478-1483, as widely tabulated; early bands: Møller, Minnaar and others 1999-2007",
		points([2]float64{500, 3.2}, [2]float64{1000, 2}, [2]float64{2000, 1}, [2]float64{4000, 1.5}, [2]float64{8000, 2}),
		flat(1.2, 1000, 2000, 4000, 8000, 12000),
		"Derived for clicks over headphones heard by untrained listeners. The paper prints a graph; another reading of it differs by up to 0.2 ms."),
	audible("trained",
		"Blauert and Laws 1978, JASA 63(5) 1478-1483: one trained subject",
		flat(0.4, 4000), nil,
		"Derived for impulses over headphones; one listener, after practice, at one frequency."),
	audible("moller",
		"Møller, Minnaar, Olesen, Christensen, Plogsties 1999-2007 (JAES 2007)",
		flat(1.6, 1000, 2000, 4000, 8000, 12000), flat(1.2, 1000, 2000, 4000, 8000, 12000),
		"Derived for all-pass filters, early bands with their response reversed in time, over headphones; 1.5 ms for late bands in one of the papers."),
	audible("flanagan",
		"Flanagan, Moore and Stone 2005, JAES 53(7/8) 593-611",
		flat(1.6, 1000, 2000, 4000), nil,
		"Derived for clicks over headphones; over loudspeakers in a dry room only slightly higher."),
	audible("jensen",
		"Jensen and Møller",
		points([2]float64{250, 4.7}, [2]float64{500, 2.3}, [2]float64{800, 1.5}, [2]float64{1200, 1.6}, [2]float64{2000, 1.6}), nil,
		"Derived over headphones; the only study here under 500 Hz."),
	audible("green",
		"Green 1971",
		flat(2, 625, 1875, 4062), nil,
		"Derived for clicks through an all-pass filter."),
	audible("deer",
		"Deer and others 1985",
		flat(2, 2000), nil,
		"Derived for clicks through an all-pass filter, at one frequency."),
	audible("hoshino",
		"Hoshino and Takegahara",
		flat(2, 10000, 12000, 15000, 20000), nil,
		"The only study here above 12 kHz; its signals are not known to this program."),
	liski("liski-impulse", "a single unit impulse",
		points([2]float64{500, 0.96}, [2]float64{1000, 0.77}, [2]float64{2000, 0.69}, [2]float64{3000, 0.64}, [2]float64{4000, 0.75}),
		points([2]float64{500, 0.84}, [2]float64{1000, 0.51}, [2]float64{2000, 0.68}, [2]float64{3000, 0.65}, [2]float64{4000, 0.77})),
	liski("liski-pink", "a single impulse with a pink spectrum, the most critical signal of the study",
		points([2]float64{500, 1.09}, [2]float64{1000, 0.83}, [2]float64{2000, 0.48}, [2]float64{3000, 0.33}, [2]float64{4000, 0.46}),
		points([2]float64{500, 0.45}, [2]float64{1000, 0.49}, [2]float64{2000, 0.46}, [2]float64{3000, 0.64}, [2]float64{4000, 0.76})),
	liski("liski-castanet", "a castanet",
		points([2]float64{500, 3.15}, [2]float64{1000, 2.1}, [2]float64{2000, 1.65}, [2]float64{3000, 1.61}, [2]float64{4000, 1.61}),
		points([2]float64{500, 1.61}, [2]float64{1000, 0.94}, [2]float64{2000, 2.18}, [2]float64{3000, 1.19}, [2]float64{4000, 1.41})),
	liski("liski-hihat", "a hi-hat",
		points([2]float64{500, 2.77}, [2]float64{1000, 4.55}, [2]float64{2000, 3}, [2]float64{3000, 1.41}, [2]float64{4000, 2.13}),
		points([2]float64{500, 1.41}, [2]float64{1000, 0.99}, [2]float64{2000, 2.05}, [2]float64{3000, 2.27}, [2]float64{4000, 2.28})),

	sound("j21", "ITU-T J.21 (CCIR 505), 15 kHz type", ramped+", from memory too", "15 kHz",
		[2]float64{40, 55}, [2]float64{75, 24}, [2]float64{14000, 8}, [2]float64{15000, 12}),
	sound("j22", "ITU-T J.22, 10 kHz type, with low confidence", ramped+", which is not the source's", "10 kHz",
		[2]float64{50, 80}, [2]float64{100, 20}, [2]float64{10000, 8}),
	sound("j23", "ITU-T J.23, 7 kHz type, with low confidence", ramped+", which is not the source's", "7 kHz",
		[2]float64{50, 80}, [2]float64{100, 20}, [2]float64{6400, 5}, [2]float64{7000, 10}),

	voice("exchange", "transmission tables of one maker of telephone exchanges (of the type of ITU-T Q.551), analogue to analogue", Published,
		"Derived for a connection through a telephone exchange.",
		[3]float64{500, 600, 1.8}, [3]float64{600, 1000, 0.9}, [3]float64{1000, 2600, 0.3}, [3]float64{2600, 2800, 1.5}),
	voice("cfr-1755", "7 CFR 1755.405, envelope delay distortion, as quoted elsewhere", Published,
		"Derived for telephone lines in the United States; it has limits at two frequencies only.",
		[3]float64{604, 604, 1.5}, [3]float64{2804, 2804, 1}),
	voice("g712", "ITU-T G.712, analogue to analogue", FromMemory,
		"Derived for the coder and decoder of one telephone channel.",
		[3]float64{500, 600, 1.5}, [3]float64{600, 1000, 0.75}, [3]float64{1000, 2600, 0.25}, [3]float64{2600, 2800, 1.5}),
	voice("g712-half", "ITU-T G.712, analogue to digital or digital to analogue", FromMemory,
		"Derived for the coder or the decoder of one telephone channel.",
		[3]float64{500, 600, 0.75}, [3]float64{600, 1000, 0.375}, [3]float64{1000, 2600, 0.125}, [3]float64{2600, 2800, 0.75}),
	voice("m1020", "ITU-T M.1020", FromMemory,
		"Derived for leased telephone circuits that carry data.",
		[3]float64{500, 600, 3}, [3]float64{600, 1000, 1.5}, [3]float64{1000, 2600, 0.5}, [3]float64{2600, 2800, 3}),

	preMasking(20, "a university's course page, 1998: up to 20 ms (so too an instrument maker's documentation)"),
	preMasking(10, "an encyclopaedic article: about 10 ms"),
	preMasking(5, "Huang and others 2001, quoted by a teaching page: about 5 ms"),
	preMasking(2, "Spanias, Painter and Atti, Audio Signal Processing and Coding, 5.5, citing Zwicker 1990: significant for 1 to 2 ms"),
	postMasking(200, "a university's course page, 1998: up to 200 ms"),
	postMasking(100, "an instrument maker's documentation: about 100 ms"),
	postMasking(50, "an encyclopaedic article: about 50 ms (Spanias, Painter and Atti, 5.5: 50 to 300 ms by level and duration)"),
}

// liski is one signal of a study that has thresholds for late and early bands.
func liski(name, signal string, late, early []row) Limit {
	return audible(name, "Liski, Mäkivirta and Välimäki 2021, IEEE/ACM TASLP 29, 2189-2201, Table III", late, early,
		"Derived for "+signal+" over headphones at 80 dB SPL, 12 listeners, the 75 % point of ABX tests.")
}

// sound is a recommendation for sound-programme circuits.
func sound(name, source, between, kind string, pairs ...[2]float64) Limit {
	return circuit(name, source, FromMemory, table{points(pairs...), true}, between,
		"Derived for a whole circuit of 2500 km of the "+kind+" type for sound programmes: loose for one filter.")
}

// voice is a mask for telephone circuits.
func voice(name, source string, status Status, help string, triples ...[3]float64) Limit {
	return circuit(name, source, status, table{steps(triples...), false}, stepped, help+" It says nothing of other frequencies.")
}
