// Does what fettle's render does, with libsndfile and FFTW: filters a stereo
// recording of 24 bits, takes the latency of a symmetric kernel away, adds TPDF
// dither and writes 24 bits. It hashes nothing, measures no peaks, syncs nothing.
//
//	render WISDOM TAPS SIZE IN OUT
//
// TAPS is a text with a tap a line and remarks behind #, SIZE the transforms' length. It prints the
// seconds spent on planning, reading, filtering, dithering and writing, and the
// whole without planning. What planning found is kept in the file WISDOM.
//
// Written to be fast: a frame of two channels is a complex number, so libsndfile
// reads straight into the transform's buffer; a block is read and written in one
// call; dither comes from many generators abreast.
#include "convolver.h"

#include <fftw3.h>
#include <math.h>
#include <sndfile.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const double full_scale = 1 << 23; // of 24 bits, in steps

// generator is Marsaglia's 64-bit xorshift (2003, shifts 13, 7, 17), many abreast:
// a loop over 32 is made of vectors, one over 8 GCC unrolls instead.
enum { ABREAST = 32 };
struct generator {
	uint64_t state[ABREAST];
};

static struct generator new_generator(uint64_t seed)
{
	struct generator g;
	for (int i = 0; i < ABREAST; i++)
		g.state[i] = seed = (seed + (uint64_t)i) * 6364136223846793005u + 1442695040888963407u;
	return g;
}

// quantise rounds samples to 24 bits, left-justified in 32, after adding the sum
// of two uniform numbers of one step each. count is a multiple of ABREAST. It
// returns the peak in steps.
static double quantise(struct generator *g, int32_t *restrict out, const double *restrict x, size_t count)
{
	struct generator s = *g;
	double peaks[ABREAST] = {0};
	for (size_t at = 0; at < count; at += ABREAST)
		for (int i = 0; i < ABREAST; i++) {
			uint64_t u = s.state[i];
			u ^= u << 13;
			u ^= u >> 7;
			u ^= u << 17;
			s.state[i] = u;
			double triangular = (double)(int32_t)u + (double)(int32_t)(u >> 32);
			double v = rint(x[at + i] * full_scale + triangular * 0x1p-32);
			peaks[i] = fabs(v) > peaks[i] ? fabs(v) : peaks[i];
			v = v < -full_scale ? -full_scale : v;
			v = v > full_scale - 1 ? full_scale - 1 : v;
			out[at + i] = (int32_t)v * 256;
		}
	*g = s;
	double peak = 0;
	for (int i = 0; i < ABREAST; i++)
		peak = fmax(peak, peaks[i]);
	return peak;
}

// read_taps reads what fettle exports as taps: one a line behind remarks.
static double *read_taps(const char *file, size_t *taps)
{
	FILE *f = fopen(file, "r");
	if (!f)
		die("cannot be read", file);
	size_t room = 1 << 20;
	double *h = aligned(room);
	char line[256];
	*taps = 0;
	while (*taps < room && fgets(line, sizeof line, f))
		if (line[0] != '#')
			h[(*taps)++] = strtod(line, NULL);
	fclose(f);
	if (*taps % 2 == 0)
		die("does not hold an odd number of taps", file);
	return h;
}

struct spent {
	double plan, read, filter, dither, write;
};

// lap adds the time since *since to *to.
static void lap(double *to, double *since)
{
	double now = seconds_now();
	*to += now - *since;
	*since = now;
}

// render_blocks feeds the recording and enough silence behind it, and leaves the
// first latency frames out.
static double render_blocks(struct convolver *c, SNDFILE *in, SNDFILE *out, sf_count_t frames, sf_count_t latency, struct spent *spent)
{
	sf_count_t hop = (sf_count_t)convolver_delay(c);
	size_t count = (size_t)hop * CHANNELS, padded = (count + ABREAST - 1) / ABREAST * ABREAST;
	double *x = pair_input(c);
	int32_t *steps = (int32_t *)aligned(padded);
	struct generator g = new_generator(1);
	double peak = 0, since = seconds_now();
	for (sf_count_t skip = latency, left = frames; left > 0;) {
		sf_count_t got = sf_readf_double(in, x, hop);
		memset(x + got * CHANNELS, 0, (size_t)(hop - got) * CHANNELS * sizeof *x);
		lap(&spent->read, &since);
		const double *y = pair_output(c);
		lap(&spent->filter, &since);
		peak = fmax(peak, quantise(&g, steps, y, padded));
		lap(&spent->dither, &since);
		sf_count_t from = skip < hop ? skip : hop, n = hop - from < left ? hop - from : left;
		if (sf_writef_int(out, steps + from * CHANNELS, n) != n)
			die(sf_strerror(out), "render");
		skip -= from;
		left -= n;
		lap(&spent->write, &since);
	}
	free(steps);
	return peak;
}

int main(int count, char **words)
{
	if (count != 6)
		die("give wisdom, taps, size, input and output", words[0]);
	const char *wisdom = words[1];
	double begun = seconds_now(), since = begun;
	struct spent spent = {0};
	size_t taps;
	double *kernel = read_taps(words[2], &taps);
	since = seconds_now();
	fftw_import_wisdom_from_filename(wisdom);
	struct convolver *c = new_convolver(kernel, taps, COMPLEX_PAIR, strtoul(words[3], NULL, 10));
	fftw_export_wisdom_to_filename(wisdom);
	lap(&spent.plan, &since);

	SF_INFO info = {0};
	SNDFILE *in = sf_open(words[4], SFM_READ, &info);
	if (!in)
		die(sf_strerror(NULL), words[4]);
	if (info.channels != CHANNELS || (info.format & SF_FORMAT_SUBMASK) != SF_FORMAT_PCM_24)
		die("is not stereo of 24 bits", words[4]);
	SF_INFO as = {.samplerate = info.samplerate, .channels = CHANNELS, .format = SF_FORMAT_WAV | SF_FORMAT_PCM_24};
	SNDFILE *out = sf_open(words[5], SFM_WRITE, &as);
	if (!out)
		die(sf_strerror(NULL), words[5]);
	double peak = render_blocks(c, in, out, info.frames, (sf_count_t)(taps - 1) / 2, &spent);
	if (sf_close(out) || sf_close(in))
		die("closing failed", words[5]);
	double whole = seconds_now() - begun - spent.plan;
	if (peak > full_scale - 1)
		die("was clipped", words[5]);
	printf("plan %.4f read %.4f filter %.4f dither %.4f write %.4f whole %.4f\n",
		spent.plan, spent.read, spent.filter, spent.dither, spent.write, whole);
	free_convolver(c);
	free(kernel);
}
