// The inner loop of the cloud in plain C, for comparison only: the same
// arithmetic on the same numbers. Reads a problem from the file named first,
// runs it as often as named second, prints the least seconds of a run and the
// last positions' sums.
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

static uint64_t mix64(uint64_t z) {
	z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
	z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
	return z ^ (z >> 31);
}

typedef struct { double c0, c1; } cell;
typedef struct { double wE, wN, wS, cE, cN, cS; } forcing;
static cell table[4096];

static inline double normal(uint32_t u) {
	double w = (double)((int32_t)u | 1);
	uint64_t b;
	memcpy(&b, &w, 8);
	cell *c = &table[((b >> 46) + 64 & 2047) | (b >> 63) * 2048];
	return c->c0 + c->c1 * w;
}

#define FIELDS 16
static const uint64_t golden = 0x9e3779b97f4a7c15u;

static void run(double **m, const uint64_t *keys, const forcing *env, int n, int steps, double dt, double keep, double kick, uint32_t jibe) {
	for (int i = 0; i < n; i++) {
		double x = m[0][i], y = m[1][i], wE = m[2][i], wN = m[3][i], cE = m[4][i], cN = m[5][i];
		double pE = m[6][i], pN = m[7][i], qE = m[8][i], qN = m[9][i];
		double dA = m[10][i], dB = m[11][i], sA = m[12][i], sB = m[13][i], oA = m[14][i], oB = m[15][i];
		uint64_t key = keys[i];
		for (int s = 0; s < steps; s++) {
			const forcing *f = &env[s];
			double wx = f->wE + f->wS * wE, wy = f->wN + f->wS * wN;
			double vx = f->cE + f->cS * cE, vy = f->cN + f->cS * cN;
			double w = sqrt(wx * wx + wy * wy);
			if (w > 0) {
				double down = dA * w + dB, side = sA * w + sB;
				if (down > 0) {
					double per = 1 / w;
					down *= per;
					side *= per;
					vx += down * wx + side * wy;
					vy += down * wy - side * wx;
				}
			}
			x += vx * dt;
			y += vy * dt;
			uint64_t a = mix64(key + golden), b = mix64(key + 2 * golden);
			wE = keep * wE + pE + kick * normal((uint32_t)a);
			wN = keep * wN + pN + kick * normal((uint32_t)(a >> 32));
			cE = keep * cE + qE + kick * normal((uint32_t)b);
			cN = keep * cN + qN + kick * normal((uint32_t)(b >> 32));
			if (s % 4 == 3 && (uint32_t)(mix64(key) >> 32) < jibe) {
				double t = sA; sA = oA; oA = t;
				t = sB; sB = oB; oB = t;
			}
			key += 3 * golden;
		}
		m[0][i] = x; m[1][i] = y; m[2][i] = wE; m[3][i] = wN; m[4][i] = cE; m[5][i] = cN;
		m[12][i] = sA; m[13][i] = sB; m[14][i] = oA; m[15][i] = oB;
	}
}

static void take(void *p, size_t size, FILE *f) {
	if (fread(p, 1, size, f) != size) exit(2);
}

int main(int argc, char **argv) {
	FILE *f = fopen(argv[1], "rb");
	if (argc < 3 || !f) return 2;
	double head[6];
	take(head, sizeof head, f);
	int n = (int)head[0], steps = (int)head[1];
	take(table, sizeof table, f);
	forcing *env = malloc(sizeof(forcing) * steps);
	take(env, sizeof(forcing) * steps, f);
	uint64_t *keys = malloc(8 * (size_t)n);
	take(keys, 8 * (size_t)n, f);
	double *first[FIELDS], *m[FIELDS];
	for (int k = 0; k < FIELDS; k++) {
		first[k] = malloc(8 * (size_t)n);
		m[k] = malloc(8 * (size_t)n);
		take(first[k], 8 * (size_t)n, f);
	}
	double best = 1e9;
	for (int r = atoi(argv[2]); r > 0; r--) {
		for (int k = 0; k < FIELDS; k++) memcpy(m[k], first[k], 8 * (size_t)n);
		struct timespec a, b;
		clock_gettime(CLOCK_MONOTONIC, &a);
		for (int s = 0; s < steps; s += 64) { // in chunks, as the cloud does
			int now = steps - s < 64 ? steps - s : 64;
			if (s > 0) for (int i = 0; i < n; i++) keys[i] += 64 * 3 * golden;
			run(m, keys, env + s, n, now, head[2], head[3], head[4], (uint32_t)head[5]);
		}
		clock_gettime(CLOCK_MONOTONIC, &b);
		double t = (double)(b.tv_sec - a.tv_sec) + 1e-9 * (double)(b.tv_nsec - a.tv_nsec);
		if (t < best) best = t;
		for (int i = 0; i < n; i++) keys[i] -= (uint64_t)((steps - 1) / 64) * 64 * 3 * golden;
	}
	double sx = 0, sy = 0;
	for (int i = 0; i < n; i++) { sx += m[0][i]; sy += m[1][i]; }
	printf("%.9f %.17g %.17g\n", best, sx / n, sy / n);
	return 0;
}
