// Overlap-save on FFTW: the convolver that fettle is measured against.
#ifndef CONVOLVER_H
#define CONVOLVER_H

#include <stddef.h>

// How two channels go through the transforms. FFTW's split arrays (planes as
// real and imaginary part) and its interleaved batches were tried too: from
// 4,096 points on both are slower than any of these.
enum way {
	REAL_EACH,     // a real transform for each channel
	COMPLEX_PAIR,  // left and right as one complex signal, out of place
	COMPLEX_PLACE, // the same, spectrum and inverse in one buffer
	WAYS
};

extern const char *const way_names[WAYS];

enum { CHANNELS = 2 };

struct convolver;

// new_convolver plans a convolver of blocks of size points, size > taps.
// Planning is FFTW_MEASURE, or what the wisdom at hand says.
struct convolver *new_convolver(const double *kernel, size_t taps, enum way way, size_t size);
void free_convolver(struct convolver *c);

// process filters frames of two planes, delayed by convolver_delay frames.
// Calls may be of any length; blocks are the convolver's own.
void process(struct convolver *c, double *const y[CHANNELS], const double *const x[CHANNELS], size_t frames);
size_t convolver_delay(const struct convolver *c);

// A pair of channels is interleaved frames already, as in a recording: fill
// pair_input with convolver_delay frames, and pair_output filters them and tells
// where they are, of no delay. Not for REAL_EACH, and not mixed with process.
double *pair_input(struct convolver *c);
const double *pair_output(struct convolver *c);

// A choice is the way and size that search_choice found fastest.
struct choice {
	enum way way;
	size_t size;
};

// Choices are kept in a file of lines "taps way size". load_choice is false
// where the file holds none for these taps.
int load_choice(const char *file, size_t taps, struct choice *choice);
void save_choice(const char *file, size_t taps, struct choice choice);

struct choice search_choice(const double *kernel, size_t taps);

// pace is the rate at which c goes through a long stream in calls of 8192
// frames over at least some seconds, in samples of all channels a second. The
// calls reuse their buffers, as in fettle's BenchmarkFIR.
double pace(struct convolver *c, double seconds);

double seconds_now(void);

// aligned is a zeroed array of doubles at a cache line.
double *aligned(size_t count);

_Noreturn void die(const char *what, const char *name);

#endif
