#define _GNU_SOURCE
#include "convolver.h"

#include <errno.h>
#include <fftw3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

const char *const way_names[WAYS] = {"real", "pair", "pair-in-place"};

// x gathers a block with its history in front, y holds the last block filtered;
// h is the kernel's spectrum with the transforms' 1/size in it. A pair's x and y
// are interleaved and its h covers all frequencies.
struct convolver {
	enum way way;
	size_t size, history, hop, filled;
	fftw_plan forward, inverse;
	double *x[CHANNELS], *y[CHANNELS];
	fftw_complex *spectrum, *h;
};

_Noreturn void die(const char *what, const char *name)
{
	fprintf(stderr, "%s: %s%s%s\n", name, what, errno ? ": " : "", errno ? strerror(errno) : "");
	exit(1);
}

double seconds_now(void)
{
	struct timespec t;
	clock_gettime(CLOCK_MONOTONIC, &t);
	return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

double *aligned(size_t count)
{
	size_t bytes = (count * sizeof(double) + 63) / 64 * 64;
	double *p = aligned_alloc(64, bytes);
	if (!p)
		die("out of memory", "convolver");
	return memset(p, 0, bytes);
}

static size_t bins(const struct convolver *c)
{
	return c->way == REAL_EACH ? c->size / 2 + 1 : c->size;
}

// plan_transforms makes both plans. x survives the forward transform in every
// way, because the next block's history is in it.
static void plan_transforms(struct convolver *c)
{
	int n = (int)c->size;
	if (c->way == REAL_EACH) {
		c->forward = fftw_plan_dft_r2c_1d(n, c->x[0], c->spectrum, FFTW_MEASURE | FFTW_PRESERVE_INPUT);
		c->inverse = fftw_plan_dft_c2r_1d(n, c->spectrum, c->y[0], FFTW_MEASURE | FFTW_DESTROY_INPUT);
	} else {
		c->forward = fftw_plan_dft_1d(n, (fftw_complex *)c->x[0], c->spectrum, FFTW_FORWARD, FFTW_MEASURE);
		c->inverse = fftw_plan_dft_1d(n, c->spectrum, (fftw_complex *)c->y[0], FFTW_BACKWARD, FFTW_MEASURE);
	}
	if (!c->forward || !c->inverse)
		die("FFTW made no plan", "convolver");
}

// set_kernel transforms the kernel. It stands in x as the left channel.
static void set_kernel(struct convolver *c, const double *kernel, size_t taps)
{
	size_t step = c->way == REAL_EACH ? 1 : 2;
	memset(c->x[0], 0, c->size * step * sizeof(double));
	for (size_t i = 0; i < taps; i++)
		c->x[0][i * step] = kernel[i] / (double)c->size;
	fftw_execute(c->forward);
	memcpy(c->h, c->spectrum, bins(c) * sizeof(fftw_complex));
	memset(c->x[0], 0, c->size * step * sizeof(double));
	memset(c->y[0], 0, c->size * step * sizeof(double));
}

struct convolver *new_convolver(const double *kernel, size_t taps, enum way way, size_t size)
{
	struct convolver *c = calloc(1, sizeof *c);
	if (!c)
		die("out of memory", "convolver");
	c->way = way;
	c->size = size;
	c->history = taps - 1;
	c->hop = size - c->history;
	size_t planes = way == REAL_EACH ? CHANNELS : 1;
	for (size_t i = 0; i < planes; i++) {
		c->x[i] = aligned(size * CHANNELS / planes);
		c->y[i] = way == COMPLEX_PLACE ? NULL : aligned(size * CHANNELS / planes);
	}
	c->h = (fftw_complex *)aligned(2 * bins(c));
	c->spectrum = (fftw_complex *)aligned(2 * bins(c));
	if (way == COMPLEX_PLACE)
		c->y[0] = (double *)c->spectrum;
	plan_transforms(c);
	set_kernel(c, kernel, taps);
	return c;
}

void free_convolver(struct convolver *c)
{
	fftw_destroy_plan(c->forward);
	fftw_destroy_plan(c->inverse);
	for (size_t i = 0; i < CHANNELS; i++) {
		free(c->x[i]);
		if (c->way != COMPLEX_PLACE)
			free(c->y[i]);
	}
	free(c->h);
	free(c->spectrum);
	free(c);
}

size_t convolver_delay(const struct convolver *c)
{
	return c->hop;
}

// multiply is s *= h. Written in real numbers it becomes whole-vector shuffles
// and fused multiply-add-subtracts; the operator of C99 would check for infinities.
static void multiply(double *restrict s, const double *restrict h, size_t count)
{
	s = __builtin_assume_aligned(s, 64);
	h = __builtin_assume_aligned(h, 64);
	for (size_t i = 0; i < 2 * count; i += 2) {
		double re = s[i] * h[i] - s[i + 1] * h[i + 1];
		double im = s[i] * h[i + 1] + s[i + 1] * h[i];
		s[i] = re;
		s[i + 1] = im;
	}
}

static void filter_real(struct convolver *c)
{
	for (size_t i = 0; i < CHANNELS; i++) {
		fftw_execute_dft_r2c(c->forward, c->x[i], c->spectrum);
		multiply((double *)c->spectrum, (const double *)c->h, bins(c));
		fftw_execute_dft_c2r(c->inverse, c->spectrum, c->y[i]);
		memmove(c->x[i], c->x[i] + c->hop, c->history * sizeof(double));
	}
}

static void filter_pair(struct convolver *c)
{
	fftw_execute(c->forward);
	multiply((double *)c->spectrum, (const double *)c->h, bins(c));
	fftw_execute(c->inverse);
	memmove(c->x[0], c->x[0] + 2 * c->hop, c->history * 2 * sizeof(double));
}

static void interleave(double *restrict z, const double *restrict l, const double *restrict r, size_t n)
{
	for (size_t i = 0; i < n; i++) {
		z[2 * i] = l[i];
		z[2 * i + 1] = r[i];
	}
}

static void deinterleave(double *restrict l, double *restrict r, const double *restrict z, size_t n)
{
	for (size_t i = 0; i < n; i++) {
		l[i] = z[2 * i];
		r[i] = z[2 * i + 1];
	}
}

// exchange takes n frames in and gives n frames of the last block out.
static void exchange(struct convolver *c, double *const y[CHANNELS], const double *const x[CHANNELS], size_t at, size_t n)
{
	size_t place = c->history + c->filled;
	if (c->way != REAL_EACH) {
		interleave(c->x[0] + 2 * place, x[0] + at, x[1] + at, n);
		deinterleave(y[0] + at, y[1] + at, c->y[0] + 2 * place, n);
		return;
	}
	for (size_t i = 0; i < CHANNELS; i++) {
		memcpy(c->x[i] + place, x[i] + at, n * sizeof(double));
		memcpy(y[i] + at, c->y[i] + place, n * sizeof(double));
	}
}

void process(struct convolver *c, double *const y[CHANNELS], const double *const x[CHANNELS], size_t frames)
{
	for (size_t at = 0; at < frames;) {
		size_t n = c->hop - c->filled;
		if (n > frames - at)
			n = frames - at;
		exchange(c, y, x, at, n);
		at += n;
		c->filled += n;
		if (c->filled == c->hop) {
			if (c->way == REAL_EACH)
				filter_real(c);
			else
				filter_pair(c);
			c->filled = 0;
		}
	}
}

double *pair_input(struct convolver *c)
{
	return c->x[0] + 2 * c->history;
}

const double *pair_output(struct convolver *c)
{
	filter_pair(c);
	return c->y[0] + 2 * c->history;
}

enum { CALL_FRAMES = 8192 };

// filter_blocks runs at least four blocks through c and returns the samples.
static size_t filter_blocks(struct convolver *c, double *const y[CHANNELS], double *const x[CHANNELS])
{
	size_t frames = 0;
	for (; frames < 4 * c->hop; frames += CALL_FRAMES)
		process(c, y, (const double *const *)x, CALL_FRAMES);
	return frames * CHANNELS;
}

double pace(struct convolver *c, double seconds)
{
	double *x[CHANNELS], *y[CHANNELS];
	for (size_t i = 0; i < CHANNELS; i++) {
		x[i] = aligned(CALL_FRAMES);
		y[i] = aligned(CALL_FRAMES);
		for (size_t k = 0; k < CALL_FRAMES; k++)
			x[i][k] = (double)rand() / RAND_MAX - 0.5;
	}
	filter_blocks(c, y, x); // warms the caches
	double samples = 0, begun = seconds_now(), spent;
	do {
		samples += (double)filter_blocks(c, y, x);
		spent = seconds_now() - begun;
	} while (spent < seconds);
	for (size_t i = 0; i < CHANNELS; i++) {
		free(x[i]);
		free(y[i]);
	}
	return samples / spent;
}

int load_choice(const char *file, size_t taps, struct choice *choice)
{
	FILE *f = fopen(file, "r");
	if (!f)
		return 0;
	size_t found, size;
	char name[32];
	int known = 0;
	while (fscanf(f, "%zu %31s %zu", &found, name, &size) == 3)
		for (int way = 0; way < WAYS; way++)
			if (found == taps && !strcmp(name, way_names[way])) {
				*choice = (struct choice){(enum way)way, size};
				known = 1;
			}
	fclose(f);
	return known;
}

void save_choice(const char *file, size_t taps, struct choice choice)
{
	FILE *f = fopen(file, "a");
	if (!f || fprintf(f, "%zu %s %zu\n", taps, way_names[choice.way], choice.size) < 0 || fclose(f))
		die("cannot be written", file);
}

// A candidate of the search with the best pace it has shown.
struct candidate {
	struct choice choice;
	double pace;
};

static void try_candidate(struct candidate *t, const double *kernel, size_t taps, double seconds)
{
	struct convolver *c = new_convolver(kernel, taps, t->choice.way, t->choice.size);
	double p = pace(c, seconds);
	if (p > t->pace)
		t->pace = p;
	free_convolver(c);
}

static int by_pace(const void *a, const void *b)
{
	double p = ((const struct candidate *)a)->pace, q = ((const struct candidate *)b)->pace;
	return (p < q) - (p > q);
}

// search_choice looks at every power of two from two to 32 times the taps, and
// at 9/8, 5/4, 3/2, 7/4 and 15/8 of each, until an octave falls a fifth behind
// the best. The foremost are then run against each other.
struct choice search_choice(const double *kernel, size_t taps)
{
	static const size_t eighths[] = {8, 9, 10, 12, 14, 15};
	enum { MOST = 512, FOREMOST = 8, RUNS = 5 };
	struct candidate tried[MOST];
	size_t count = 0;
	double best = 0, octave = 0;
	size_t size = 64;
	while (size < 2 * taps)
		size *= 2;
	for (; size <= 32 * taps && octave >= 0.8 * best; size *= 2) {
		octave = 0;
		for (size_t i = 0; i < sizeof eighths / sizeof *eighths; i++)
			for (int way = 0; way < WAYS && count < MOST; way++) {
				struct candidate *t = &tried[count++];
				*t = (struct candidate){{(enum way)way, size / 8 * eighths[i]}, 0};
				try_candidate(t, kernel, taps, 0.1);
				if (t->pace > octave)
					octave = t->pace;
			}
		if (octave > best)
			best = octave;
	}
	qsort(tried, count, sizeof *tried, by_pace);
	if (count > FOREMOST)
		count = FOREMOST;
	for (int run = 0; run < RUNS; run++)
		for (size_t i = 0; i < count; i++)
			try_candidate(&tried[i], kernel, taps, 0.2);
	qsort(tried, count, sizeof *tried, by_pace);
	for (size_t i = 0; i < count; i++)
		fprintf(stderr, "  %zu taps, %s, %zu points: %.0f Msamples/s\n", taps, way_names[tried[i].choice.way], tried[i].choice.size, tried[i].pace / 1e6);
	return tried[0].choice;
}
