// Writes invented recordings for the comparison: hiss through a lowpass, in
// syllables of random level and length, so that peaks are as sparse as in speech.
//
//	recording FRAMES CHANNELS RATE BITS FILE...
//
// The same words give the same bytes; files differ by their place in the row.
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static uint64_t state;

// uniform is Marsaglia's 64-bit xorshift (2003), from -1 to 1.
static double uniform(void)
{
	state ^= state << 13;
	state ^= state >> 7;
	state ^= state << 17;
	return (double)(int32_t)(state >> 32) * 0x1p-31;
}

static uint8_t *put(uint8_t *p, uint64_t v, unsigned bytes)
{
	while (bytes--) {
		*p++ = (uint8_t)v;
		v >>= 8;
	}
	return p;
}

static void write_header(FILE *f, uint64_t data, unsigned channels, unsigned rate, unsigned bits)
{
	uint8_t h[44], *p = h;
	unsigned frame = channels * bits / 8;
	memcpy(p, "RIFF", 4);
	p = put(p + 4, data + 36, 4);
	memcpy(p, "WAVEfmt ", 8);
	p = put(p + 8, 16, 4);
	p = put(p, 1, 2);
	p = put(p, channels, 2);
	p = put(p, rate, 4);
	p = put(p, (uint64_t)rate * frame, 4);
	p = put(p, frame, 2);
	p = put(p, bits, 2);
	memcpy(p, "data", 4);
	put(p + 4, data, 4);
	fwrite(h, 1, sizeof h, f);
}

// syllable is one swell: up and down over some frames to a peak level.
struct syllable {
	long frames, at;
	double level;
};

static double envelope(struct syllable *s, unsigned rate)
{
	if (s->at++ >= s->frames) {
		s->at = 0;
		s->frames = (long)(rate * (0.15 + 0.1 * uniform()));
		s->level = 0.3 * pow(10, 0.75 * (uniform() - 1)); // down to -30 dB
	}
	return s->level * sin(M_PI * (double)s->at / (double)s->frames);
}

static void write_sound(FILE *f, long frames, unsigned channels, unsigned rate, unsigned bits)
{
	struct syllable s = {0};
	double low[64] = {0}, steps = (double)(1 << (bits - 1));
	uint8_t *buffer = malloc((size_t)4096 * channels * bits / 8), *p = buffer;
	for (long i = 0; i < frames; i++) {
		double e = envelope(&s, rate);
		for (unsigned c = 0; c < channels; c++) {
			low[c] += 0.2 * (uniform() - low[c]);
			p = put(p, (uint64_t)(int64_t)lrint(steps * (e * low[c] + 1e-4 * uniform())), bits / 8);
		}
		if (i % 4096 == 4095 || i == frames - 1) {
			fwrite(buffer, 1, (size_t)(p - buffer), f);
			p = buffer;
		}
	}
	free(buffer);
}

int main(int count, char **words)
{
	if (count < 6) {
		fprintf(stderr, "usage: recording FRAMES CHANNELS RATE BITS FILE...\n");
		return 1;
	}
	long frames = atol(words[1]);
	unsigned channels = (unsigned)atoi(words[2]), rate = (unsigned)atoi(words[3]), bits = (unsigned)atoi(words[4]);
	for (int i = 5; i < count; i++) {
		state = 0x9e3779b97f4a7c15u * (uint64_t)i;
		FILE *f = fopen(words[i], "wb");
		if (!f) {
			perror(words[i]);
			return 1;
		}
		write_header(f, (uint64_t)frames * channels * bits / 8, channels, rate, bits);
		write_sound(f, frames, channels, rate, bits);
		if (ferror(f) || fclose(f)) {
			perror(words[i]);
			return 1;
		}
	}
}
