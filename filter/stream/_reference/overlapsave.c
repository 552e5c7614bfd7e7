// Measures overlap-save on FFTW: double precision, FFTW_MEASURE, one thread, a
// stereo stream in planes.
//
//	overlapsave search FOLDER TAPS...  finds the best way and block size and keeps
//	                                   them, with FFTW's wisdom, in FOLDER
//	overlapsave check FOLDER TAPS...   compares with direct convolution
//	overlapsave run FOLDER TAPS...     prints lines "taps Msamples/s way size"
//	overlapsave version                prints FFTW's version and instruction sets
#include "convolver.h"

#include <fftw3.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const double run_seconds = 0.5;

static double random_sample(void)
{
	return 2 * (double)rand() / RAND_MAX - 1;
}

// random_kernel has unit energy, so that full scale in is about full scale out.
static double *random_kernel(size_t taps)
{
	double *h = aligned(taps);
	for (size_t i = 0; i < taps; i++)
		h[i] = random_sample() * sqrt(3.0 / (double)taps);
	return h;
}

// worst_error filters three blocks in calls of odd lengths and compares one in
// a thousand frames with direct convolution in extended precision.
static double worst_error(struct convolver *c, const double *kernel, size_t taps)
{
	size_t delay = convolver_delay(c), frames = 3 * delay + taps;
	double *x[CHANNELS], *y[CHANNELS];
	for (size_t i = 0; i < CHANNELS; i++) {
		x[i] = aligned(frames);
		y[i] = aligned(frames);
		for (size_t k = 0; k < frames; k++)
			x[i][k] = random_sample();
	}
	for (size_t at = 0; at < frames;) {
		size_t n = 1 + (size_t)rand() % 5000;
		if (n > frames - at)
			n = frames - at;
		process(c, (double *[]){y[0] + at, y[1] + at}, (const double *[]){x[0] + at, x[1] + at}, n);
		at += n;
	}
	double worst = 0;
	for (size_t k = delay; k < frames; k += 1 + (size_t)rand() % 2000)
		for (size_t i = 0; i < CHANNELS; i++) {
			long double sum = 0;
			for (size_t m = 0; m < taps && m <= k - delay; m++)
				sum += (long double)kernel[m] * x[i][k - delay - m];
			worst = fmax(worst, fabs((double)(y[i][k] - sum)));
		}
	for (size_t i = 0; i < CHANNELS; i++) {
		free(x[i]);
		free(y[i]);
	}
	return worst;
}

static void search(const char *choices, const char *wisdom, const double *kernel, size_t taps)
{
	struct choice choice;
	if (load_choice(choices, taps, &choice))
		return;
	save_choice(choices, taps, search_choice(kernel, taps));
	if (!fftw_export_wisdom_to_filename(wisdom))
		die("cannot be written", wisdom);
}

static void check(struct choice choice, const double *kernel, size_t taps)
{
	// Each transform rounds by some 1e-16 of the signal's RMS times the root of
	// the logarithm of its size; the worst of some thousand is a few times that.
	const double limit = 5e-15;
	for (int way = 0; way < WAYS; way++) {
		struct convolver *c = new_convolver(kernel, taps, (enum way)way, choice.size);
		double worst = worst_error(c, kernel, taps);
		printf("%zu %s %zu worst error %.1e\n", taps, way_names[way], choice.size, worst);
		if (!(worst < limit))
			die("departs from direct convolution", "overlapsave");
		free_convolver(c);
	}
}

static void run(struct choice choice, const double *kernel, size_t taps)
{
	struct convolver *c = new_convolver(kernel, taps, choice.way, choice.size);
	printf("%zu %.1f %s %zu\n", taps, pace(c, run_seconds) / 1e6, way_names[choice.way], choice.size);
	free_convolver(c);
}

int main(int count, char **words)
{
	if (count == 2 && !strcmp(words[1], "version"))
		return puts(fftw_version) < 0;
	if (count < 4)
		die("give search, check or run, a folder and taps", words[0]);
	char choices[4096], wisdom[4096];
	snprintf(choices, sizeof choices, "%s/choices", words[2]);
	snprintf(wisdom, sizeof wisdom, "%s/wisdom", words[2]);
	fftw_import_wisdom_from_filename(wisdom); // there is none at first
	for (int i = 3; i < count; i++) {
		size_t taps = strtoul(words[i], NULL, 10);
		double *kernel = random_kernel(taps);
		struct choice choice;
		if (!strcmp(words[1], "search"))
			search(choices, wisdom, kernel, taps);
		else if (!load_choice(choices, taps, &choice))
			die("has no choice for these taps; search first", choices);
		else if (!strcmp(words[1], "check"))
			check(choice, kernel, taps);
		else
			run(choice, kernel, taps);
		free(kernel);
	}
}
