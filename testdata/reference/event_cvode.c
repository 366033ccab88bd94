/* The switching events of event.py integrated by SUNDIALS CVODE (BDF, dense linear solver), timed: a measure for speed at equal error.

Problem   event.py's, equation by equation; states that a case has no use for (the charge of a junction without recovery, the current
          beside R_fr without forward recovery) are left out, so 8 to 12 states.
Method    CVODE's variable-order BDF in CV_ONE_STEP mode, its Newton iteration, SUNDIALS' own dense LU, analytic Jacobian (-j difference:
          CVODE's difference quotients). Absolute tolerances factor·rtol·scale, scale |load| for currents, V_DD for v_gs and v_BS, the bus
          for v_ds and v_pin, |load|·tau for charges. Extremes: values at step ends, and wherever a signal's derivative changes sign within a
          step the extremum of the cubic through both ends, evaluated anew on CVodeGetDky's polynomial. Against 64
          points a step: within 0.06 % from rtol 1e-3 on, 0.02 % from 3e-4 on (relative as in event_cvode.py); about 1 % at looser ones,
          whose own error is larger.
Tuning    In the library's favour over event.json's cases: factor 0.1 and a Newton coefficient of 0.03 (CVODE: 0.1) took the least time for
          0.5 % error; order 5, CVODE's rules for renewing matrices, first step; fused vector operations on. The optimum is flat. The analytic
          Jacobian is a few per cent faster than the difference quotients.
Build     gcc -O2 -o event_cvode event_cvode.c -lsundials_cvode -lsundials_nvecserial -lm
          SUNDIALS 6.4.1. Debian's libsundials-dev 6.4.1+dfsg1-3 gives the right numbers but not the right times: it is compiled without
          optimisation (its rules set the compiler's flags to -fcommon alone) and takes three times as long. For times, build the same source
          with cmake -DCMAKE_BUILD_TYPE=Release -DBUILD_SHARED_LIBS=OFF -DCMAKE_INSTALL_PREFIX=PREFIX and add -I PREFIX/include -L PREFIX/lib.
Run       ./event_cvode [-j analytic|difference] [-o largest order] [-a factor] [-n Newton coefficient] [-m milliseconds] [-p no]
          [rtol ...] < cases
          -m: least processor time spent on each figure, default 20; -p no: no search for extremes, for its share of the time; without
          rtol: 1e-2 3e-3 1e-3 3e-4 1e-4 3e-5 1e-5 1e-6
Check     event_cvode.py writes the input from event.json, builds and runs the program and compares.

Input, text, SI units. One line is a key and its values, divided by blanks; within a case lines come in any order; "run" ends and runs a
case; nothing is carried over to the next one.
    name TEXT                        rest of the line, no tabs
    event E                          TURN_OFF, TURN_ON, SINKING_TURN_OFF, SINKING_TURN_ON
    bus, load, vdd, drive2_on, l1, l2, r1, r2, common_source1, common_source2, node_resistor, pin_capacitance, bootstrap_capacitance,
    t_end X                          one number each, all required
    ringing_resistance X             0 or no line: none
    bootstrap NVT LN_IS R            the bootstrap element
    clamp NVT LN_IS R                the node clamp; no line: none
    high.kind K, low.kind K          IGBT: no channel current for v_ds < 0; anything else: a transistor that conducts both ways
    high.c_gs, high.gate_resistance, high.off_bias, high.transconductance, high.threshold, high.on_resistance X       and low.*
    high.c_oss V C V C ...           up to 16 points, voltage rising; also high.c_rss, low.*
    high.reverse NVT LN_IS R OFFSET FOLLOWS      FOLLOWS 0 or 1: offset_follows_gate; also low.reverse
    high.recovery TAU TRANSIT        no line: none; also low.recovery
    high.forward_recovery L R        no line: none; also low.forward_recovery
    start I1 I2 V_GS1 V_DS1 V_GS2 V_DS2 V_PIN V_BS Q_M1 Q_M2 I_LFR1 I_LFR2
Output    a heading and one line per case and rtol, divided by tabs: name, rtol, CVODE's return value of its last step (0: good), steps,
          right-hand sides (with those of the difference quotients), Jacobians, processor time of one integration with the search for
          extremes [us], extremes over [0, t_end] [V].
*/
#include <cvode/cvode.h>
#include <math.h>
#include <nvector/nvector_serial.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sunlinsol/sunlinsol_dense.h>
#include <sunmatrix/sunmatrix_dense.h>
#include <time.h>

enum { I1, I2, VG1, VD1, VG2, VD2, VP, VB, STATES = 12, POINTS = 16 };
enum { NODE, U1, U2, J1, J2, G1, G2, ALGEBRAIC }; /* network's results: v_node, u, j, i_g */
enum { S_NODE, S_PIN, S_RAIL, S_DS1, S_DS2, S_GS1, S_GS2, S_FLOATING, SIGNALS };

typedef struct {
	int n;
	double v[POINTS], x[POINTS], y[POINTS], slope[POINTS]; /* x = ln(1 + v), y = ln C; slope dy/dx from the point before */
} Curve;

typedef struct {
	double nvt, ln_is, r, offset, follows, tau, transit, l_fr, r_fr; /* as read; tau, l_fr 0: none */
	double scale, shift, a, per_nvt, nvt_a, per_transit, per_tau, rate; /* prepare() */
} Junction;

typedef struct {
	int igbt;
	double c_gs, r_g, off_bias, gfs, v_th, r_on;
	Curve oss, rss;
	Junction reverse;
	int q, l; /* places of its charge and of i_Lfr among the states, -1: none */
} Switch;

typedef struct {
	char name[256], event[32];
	double bus, load, vdd, drive2_on, l1, l2, r1, r2, cs1, cs2, r_vs, ringing, c_pin, c_b, t_end, start[STATES];
	Junction element, clamp; /* clamp.nvt 0: none */
	Switch high, low;
	int n, driven_on;
	double share1, share2, g1, g2, k1, k2, gg1, gg2, denominator, drive2, network[ALGEBRAIC][8], node0; /* prepare() */
} Case;

static void fail(const char *what, const char *detail) {
	fprintf(stderr, "event_cvode: %s %s\n", what, detail);
	exit(1);
}

/* Laws. */

/* omega solves w + ln w = x: Wright omega function, Fritsch, Shafer and Crowley's iteration (Comm. ACM 16(2), 1973, from memory), once where
   the estimate of its error (Lawrence, Corless, Jeffrey, ACM Trans. Math. Software 38(3), 2012, from memory) allows, else twice. Below -200
   zero: what is left there only makes denormal numbers in the matrices. */
static double omega(double x) {
	if (x < -18) {
		double e = x < -200 ? 0 : exp(x);
		return e - e * e;
	}
	double w = x < -2 ? exp(x) : x < 1 ? exp(2 * (x - 1) / 3) : x - log(x) + log(x) / x;
	if (x < -2)
		w -= w * w - 1.5 * w * w * w;
	for (int k = 0; k < 2; k++) {
		double r = x - w - log(w), w1 = w + 1, t = 2 * w1 * (w1 + 2 * r / 3), r2 = r * r, w2 = w1 * w1;
		double error = fabs(2 * w * w - 8 * w - 1) * r2 * r2;
		w *= 1 + r / w1 * (t - r) / (t - 2 * r);
		if (error < 1e-14 * w2 * w2 * w2) /* 72 times the relative error left */
			break;
	}
	return w;
}

/* Current at the forward voltage; *w has what the derivatives need. */
static inline double junction(const Junction *j, double forward, double charge, double i_lfr, double *w) {
	double base = j->scale + charge * j->per_transit;
	*w = omega((forward - j->offset + j->r_fr * i_lfr + j->a * base) * j->per_nvt + j->shift);
	return *w * j->nvt_a - base;
}

/* C at u = ln(1 + v), and d ln C/du. */
static inline double curve(const Curve *c, double u, double *slope) {
	if (u <= c->x[0]) {
		*slope = 0;
		return exp(c->y[0]);
	}
	for (int k = 1; k < c->n; k++)
		if (u <= c->x[k]) {
			*slope = c->slope[k];
			return exp(c->y[k] + c->slope[k] * (u - c->x[k]));
		}
	*slope = 0;
	return exp(c->y[c->n - 1]);
}

/* The network's seven results from the states, as event.py has them; unit 0 leaves the sources out. */
static inline void network(const Case *c, const double *y, double unit, double *out) {
	double drive1 = c->driven_on ? y[VB] : unit * c->high.off_bias;
	double a1 = unit * c->bus - y[VD1] - c->r1 * y[I1], a2 = y[VD2] - c->r2 * y[I2];
	double missing = unit * c->load - y[I1] - y[I2] - c->k1 * c->g1 * a1 - c->k2 * c->g2 * a2;
	double gate = c->gg1 * (drive1 + y[VP] - y[VG1] - c->share1 * c->k1 * a1);
	double node = (y[VP] - c->r_vs * (missing - gate)) * c->denominator;
	double u1 = c->k1 * (a1 - node), u2 = c->k2 * (a2 - node);
	out[NODE] = node;
	out[U1] = u1;
	out[U2] = u2;
	out[J1] = y[I1] + c->g1 * u1;
	out[J2] = y[I2] + c->g2 * u2;
	out[G1] = c->gg1 * (drive1 + y[VP] - node - y[VG1] - c->share1 * u1);
	out[G2] = c->gg2 * (unit * c->drive2 - y[VG2] + c->share2 * u2);
}

/* One switch: derivatives of its v_gs and v_ds, charge and i_Lfr, and with jac (column-major, n by n) their rows of the Jacobian. */
static inline void cell(const Case *c, const Switch *s, int g, int gate, int branch, double sign, const double *y, const double *net, double *f, double *jac) {
	const Junction *d = &s->reverse;
	double vg = y[g], vd = y[g + 1], q = s->q < 0 ? 0 : y[s->q], i_lfr = s->l < 0 ? 0 : y[s->l], w;
	double forward = -vd + (d->follows ? fmin(vg, s->v_th) - s->off_bias : 0);
	double i_d = junction(d, forward, q, i_lfr, &w);

	double vdg = vd - vg, slope_gd, slope_oss, slope_rss;
	double u = vd > 0 ? log(1 + vd) : 0;
	double cgd = curve(&s->rss, vdg > 0 ? log(1 + vdg) : 0, &slope_gd), oss = curve(&s->oss, u, &slope_oss), rss = curve(&s->rss, u, &slope_rss);

	double i_sat = s->gfs * (vg - s->v_th), x = 0, t = 0, channel = 0;
	int conducts = i_sat > 0 && !(s->igbt && vd < 0);
	if (conducts) {
		x = vd / (s->r_on * i_sat);
		t = x > 20 ? 1 : tanh(x);
		channel = i_sat * t;
	}
	double into = sign * net[branch] + i_d - channel, i_g = net[gate];
	double a = s->c_gs + cgd, b = oss - rss + cgd, per_det = 1 / (a * b - cgd * cgd);
	double fg = (b * i_g + cgd * into) * per_det, fd = (a * into + cgd * i_g) * per_det;
	f[g] = fg;
	f[g + 1] = fd;
	if (s->q >= 0)
		f[s->q] = i_d - q * d->per_tau;
	if (s->l >= 0)
		f[s->l] = d->rate * (i_d - i_lfr);
	if (!jac)
		return;

	int n = c->n;
	double conductance = w / (1 + w) / d->a; /* di_D by the forward voltage */
	double d_vg = d->follows && vg < s->v_th ? conductance : 0, d_q = -d->per_transit / (1 + w), d_l = d->r_fr * conductance;
	double ch_g = conducts ? s->gfs * (t - x * (1 - t * t)) : 0, ch_d = conducts ? (1 - t * t) / s->r_on : 0;
	double cgd1 = vdg > 0 ? cgd * slope_gd / (1 + vdg) : 0, cds1 = vd > 0 ? (oss * slope_oss - rss * slope_rss) / (1 + vd) : 0;
	for (int m = 0; m < 8; m++) { /* (C_gs + C_gd) dv_g - C_gd dv_d = i_g, -C_gd dv_g + (C_ds + C_gd) dv_d = into, both sides differentiated */
		double dig = c->network[gate][m], dinto = sign * c->network[branch][m];
		if (m == g) {
			dig += cgd1 * (fg - fd);
			dinto += d_vg - ch_g + cgd1 * (fd - fg);
		} else if (m == g + 1) {
			dig -= cgd1 * (fg - fd);
			dinto -= conductance + ch_d + cgd1 * (fd - fg) + cds1 * fd;
		}
		jac[m * n + g] = (b * dig + cgd * dinto) * per_det;
		jac[m * n + g + 1] = (a * dinto + cgd * dig) * per_det;
	}
	int column[4] = {g, g + 1, s->q, s->l};
	double by[4] = {d_vg, -conductance, d_q, d_l};
	for (int m = 0; m < 4; m++) {
		if (column[m] < 0)
			continue;
		double *at = jac + column[m] * n;
		if (m > 1) {
			at[g] = cgd * by[m] * per_det;
			at[g + 1] = a * by[m] * per_det;
		}
		if (s->q >= 0)
			at[s->q] = by[m] - (m == 2 ? d->per_tau : 0);
		if (s->l >= 0)
			at[s->l] = d->rate * (by[m] - (m == 3));
	}
}

static inline void evaluate(const Case *c, const double *y, double *f, double *jac) {
	double net[ALGEBRAIC], w_b, w_c = 0;
	network(c, y, 1, net);
	cell(c, &c->high, VG1, G1, J1, 1, y, net, f, jac);
	cell(c, &c->low, VG2, G2, J2, -1, y, net, f, jac);
	double i_b = junction(&c->element, c->vdd - y[VB] - y[VP], 0, 0, &w_b), i_c = c->clamp.nvt ? junction(&c->clamp, -y[VP], 0, 0, &w_c) : 0;
	f[I1] = net[U1] / c->l1;
	f[I2] = net[U2] / c->l2;
	f[VP] = (i_b + i_c + net[J1] + net[J2] - c->load) / c->c_pin;
	f[VB] = (i_b - (c->driven_on ? net[G1] : 0)) / c->c_b;
	if (!jac)
		return;
	double g_b = w_b / (1 + w_b) / c->element.a, g_c = c->clamp.nvt ? w_c / (1 + w_c) / c->clamp.a : 0;
	for (int m = 0; m < 8; m++) {
		double *at = jac + m * c->n, element = m >= VP ? -g_b : 0;
		at[I1] = c->network[U1][m] / c->l1;
		at[I2] = c->network[U2][m] / c->l2;
		at[VP] = (element - (m == VP ? g_c : 0) + c->network[J1][m] + c->network[J2][m]) / c->c_pin;
		at[VB] = (element - (c->driven_on ? c->network[G1][m] : 0)) / c->c_b;
	}
}

static int rhs(realtype t, N_Vector y, N_Vector f, void *data) {
	(void)t;
	evaluate(data, N_VGetArrayPointer(y), N_VGetArrayPointer(f), NULL);
	double *v = N_VGetArrayPointer(f);
	return isfinite(v[VG1] + v[VD1] + v[VG2] + v[VD2] + v[VP]) ? 0 : 1;
}

static int jacobian(realtype t, N_Vector y, N_Vector f, SUNMatrix j, void *data, N_Vector a, N_Vector b, N_Vector d) {
	(void)t, (void)f, (void)a, (void)b, (void)d;
	double unused[STATES];
	evaluate(data, N_VGetArrayPointer(y), unused, SM_DATA_D(j)); /* CVODE hands over a zeroed matrix */
	return 0;
}

/* Input. */

static void prepare_junction(Junction *j) {
	if (!(j->r + j->r_fr > 0))
		fail("junction without resistance", "");
	j->scale = exp(j->ln_is);
	if (j->tau) {
		j->scale *= (j->tau + j->transit) / j->transit;
		j->per_transit = 1 / j->transit;
		j->per_tau = 1 / j->tau;
	}
	j->a = j->r + j->r_fr;
	j->shift = log(j->scale * j->a / j->nvt);
	j->per_nvt = 1 / j->nvt;
	j->nvt_a = j->nvt / j->a;
	j->rate = j->l_fr ? j->r_fr / j->l_fr : 0;
}

static void prepare_curve(Curve *c) {
	for (int k = 0; k < c->n; k++) {
		c->x[k] = log1p(c->v[k]);
		c->y[k] = log(c->y[k]);
		if (k)
			c->slope[k] = (c->y[k] - c->y[k - 1]) / (c->x[k] - c->x[k - 1]);
	}
}

static void prepare(Case *c) {
	c->driven_on = !strcmp(c->event, "TURN_ON");
	c->drive2 = !strcmp(c->event, "SINKING_TURN_ON") ? c->drive2_on : c->low.off_bias;
	c->share1 = c->cs1 / c->l1;
	c->share2 = c->cs2 / c->l2;
	c->g1 = c->ringing ? (c->l1 + c->l2) / (c->ringing * c->l1) : 0;
	c->g2 = c->ringing ? (c->l1 + c->l2) / (c->ringing * c->l2) : 0;
	c->k1 = 1 / (1 + c->r1 * c->g1);
	c->k2 = 1 / (1 + c->r2 * c->g2);
	c->gg1 = 1 / c->high.r_g;
	c->gg2 = 1 / c->low.r_g;
	c->denominator = 1 / (1 + c->r_vs * (c->k1 * c->g1 + c->k2 * c->g2 + c->gg1 * (1 - c->share1 * c->k1)));
	prepare_junction(&c->element);
	if (c->clamp.nvt)
		prepare_junction(&c->clamp);
	Switch *both[2] = {&c->high, &c->low};
	c->n = 8;
	for (int k = 0; k < 2; k++) {
		prepare_junction(&both[k]->reverse);
		prepare_curve(&both[k]->oss);
		prepare_curve(&both[k]->rss);
		both[k]->q = both[k]->reverse.tau ? c->n++ : -1;
		both[k]->l = both[k]->reverse.l_fr ? c->n++ : -1;
	}
	double y[8] = {0}, out[ALGEBRAIC];
	network(c, y, 1, out);
	c->node0 = out[NODE];
	for (int m = 0; m < 8; m++) {
		memset(y, 0, sizeof y);
		y[m] = 1;
		network(c, y, 0, out);
		for (int k = 0; k < ALGEBRAIC; k++)
			c->network[k][m] = out[k];
	}
}

/* The lines of a case: where their numbers go, side by side, and how many there are; 0 stands for a curve's pairs. */
typedef struct {
	const char *key;
	size_t to;
	int count, optional;
} Key;

static const Key CASE_KEYS[] = {
	{"bus", offsetof(Case, bus), 1, 0}, {"load", offsetof(Case, load), 1, 0}, {"vdd", offsetof(Case, vdd), 1, 0},
	{"drive2_on", offsetof(Case, drive2_on), 1, 0}, {"l1", offsetof(Case, l1), 1, 0}, {"l2", offsetof(Case, l2), 1, 0},
	{"r1", offsetof(Case, r1), 1, 0}, {"r2", offsetof(Case, r2), 1, 0}, {"common_source1", offsetof(Case, cs1), 1, 0},
	{"common_source2", offsetof(Case, cs2), 1, 0}, {"node_resistor", offsetof(Case, r_vs), 1, 0},
	{"ringing_resistance", offsetof(Case, ringing), 1, 1}, {"pin_capacitance", offsetof(Case, c_pin), 1, 0},
	{"bootstrap_capacitance", offsetof(Case, c_b), 1, 0}, {"t_end", offsetof(Case, t_end), 1, 0}, {"start", offsetof(Case, start), STATES, 0},
	{"bootstrap", offsetof(Case, element), 3, 0}, {"clamp", offsetof(Case, clamp), 3, 1}};
static const Key SWITCH_KEYS[] = {
	{"c_gs", offsetof(Switch, c_gs), 1, 0}, {"gate_resistance", offsetof(Switch, r_g), 1, 0}, {"off_bias", offsetof(Switch, off_bias), 1, 0},
	{"transconductance", offsetof(Switch, gfs), 1, 0}, {"threshold", offsetof(Switch, v_th), 1, 0}, {"on_resistance", offsetof(Switch, r_on), 1, 0},
	{"c_oss", offsetof(Switch, oss), 0, 0}, {"c_rss", offsetof(Switch, rss), 0, 0}, {"reverse", offsetof(Switch, reverse.nvt), 5, 0},
	{"recovery", offsetof(Switch, reverse.tau), 2, 1}, {"forward_recovery", offsetof(Switch, reverse.l_fr), 2, 1}};
enum { CASE_COUNT = sizeof CASE_KEYS / sizeof(Key), SWITCH_COUNT = sizeof SWITCH_KEYS / sizeof(Key) };

static void read_values(const Key *k, char *object, char *text) {
	double v[2 * POINTS + 1];
	int n = 0, limit = k->count ? k->count : 2 * POINTS;
	for (char *end; n <= limit; text = end, n++) {
		v[n] = strtod(text, &end);
		if (end == text)
			break;
	}
	while (*text == ' ')
		text++;
	if (*text || n > limit || (k->count ? n != k->count : n < 2 || n % 2))
		fail("values of", k->key);
	if (k->count) {
		memcpy(object + k->to, v, n * sizeof(double));
		return;
	}
	Curve *c = (Curve *)(object + k->to);
	c->n = n / 2;
	for (int i = 0; i < c->n; i++)
		c->v[i] = v[2 * i], c->y[i] = v[2 * i + 1];
}

/* Finds the key, reads its values and marks it. */
static void read_line(const Key *keys, int count, unsigned *seen, void *object, const char *key, char *values) {
	for (int i = 0; i < count; i++)
		if (!strcmp(keys[i].key, key)) {
			read_values(&keys[i], object, values);
			*seen |= 1u << i;
			return;
		}
	fail("unknown key", key);
}

static void check(const Key *keys, int count, unsigned seen) {
	for (int i = 0; i < count; i++)
		if (!keys[i].optional && !(seen >> i & 1))
			fail("missing", keys[i].key);
}

/* Reads one case; 0 at the end of the input. */
static int read_case(Case *c) {
	static char line[4096];
	unsigned seen = 0, seen_high = 0, seen_low = 0;
	memset(c, 0, sizeof *c);
	while (fgets(line, sizeof line, stdin)) {
		line[strcspn(line, "\r\n")] = 0;
		char *rest = line + strcspn(line, " ");
		if (*rest)
			*rest++ = 0;
		if (!strcmp(line, "name"))
			snprintf(c->name, sizeof c->name, "%s", rest);
		else if (!strcmp(line, "event"))
			snprintf(c->event, sizeof c->event, "%s", rest);
		else if (!strcmp(line, "high.kind") || !strcmp(line, "low.kind"))
			(*line == 'h' ? &c->high : &c->low)->igbt = !strcmp(rest, "IGBT");
		else if (!strncmp(line, "high.", 5))
			read_line(SWITCH_KEYS, SWITCH_COUNT, &seen_high, &c->high, line + 5, rest);
		else if (!strncmp(line, "low.", 4))
			read_line(SWITCH_KEYS, SWITCH_COUNT, &seen_low, &c->low, line + 4, rest);
		else if (strcmp(line, "run"))
			read_line(CASE_KEYS, CASE_COUNT, &seen, c, line, rest);
		else {
			check(CASE_KEYS, CASE_COUNT, seen);
			check(SWITCH_KEYS, SWITCH_COUNT, seen_high);
			check(SWITCH_KEYS, SWITCH_COUNT, seen_low);
			prepare(c);
			return 1;
		}
	}
	if (seen | seen_high | seen_low)
		fail("the last case lacks", "run");
	return 0;
}

/* Extremes. */

typedef struct {
	double low[SIGNALS], high[SIGNALS];
	double t, value[SIGNALS], rate[SIGNALS]; /* at the end of the last step */
} Track;

/* The signals are linear in the states: constant parts with unit 1, derivatives with the states' derivatives and unit 0. */
static inline void signals(const Case *c, const double *y, double unit, double *s) {
	s[S_NODE] = y[VP];
	if (c->r_vs) {
		double v = unit * c->node0;
		for (int m = 0; m < 8; m++)
			v += c->network[NODE][m] * y[m];
		s[S_NODE] = v;
	}
	s[S_PIN] = y[VP];
	s[S_RAIL] = y[VP] + y[VB];
	s[S_DS1] = y[VD1];
	s[S_DS2] = y[VD2];
	s[S_GS1] = y[VG1];
	s[S_GS2] = y[VG2];
	s[S_FLOATING] = y[VB];
}

static inline void note(Track *k, int n, double v) {
	if (v < k->low[n])
		k->low[n] = v;
	if (v > k->high[n])
		k->high[n] = v;
}

/* One step to t: its end, and the extremes within. Where the derivative changes sign the cubic through values and derivatives of both ends
   gives place and height; only what could be a new extreme is evaluated on CVODE's own polynomial. */
static int track(Track *k, const Case *c, void *cvode, double t, N_Vector y, N_Vector work) {
	double value[SIGNALS], rate[SIGNALS], at[SIGNALS], h = t - k->t, *w = N_VGetArrayPointer(work);
	int flag = CVodeGetDky(cvode, t, 1, work);
	if (flag < 0)
		return flag;
	signals(c, w, 0, rate);
	signals(c, N_VGetArrayPointer(y), 1, value);
	for (int n = 0; n < SIGNALS; n++) {
		note(k, n, value[n]);
		double d0 = h * k->rate[n], d1 = h * rate[n], rise = value[n] - k->value[n];
		if (d0 * d1 < 0) { /* p(x) = v0 + d0 x + (3 rise - 2 d0 - d1) x^2 + (d0 + d1 - 2 rise) x^3, p' = 0 */
			double c3 = 3 * (d0 + d1 - 2 * rise), c2 = 3 * rise - 2 * d0 - d1, root = sqrt(c2 * c2 - c3 * d0);
			double x = d0 > 0 ? -d0 / (c2 - root) : -d0 / (c2 + root);
			double v = k->value[n] + x * (d0 + x * (c2 + x * c3 / 3)), margin = 0.01 * fabs(v - value[n]);
			if (d0 > 0 ? v + margin > k->high[n] : v - margin < k->low[n]) {
				flag = CVodeGetDky(cvode, k->t + x * h, 0, work);
				if (flag < 0)
					return flag;
				signals(c, w, 1, at);
				note(k, n, at[n]);
			}
		}
	}
	k->t = t;
	memcpy(k->value, value, sizeof value);
	memcpy(k->rate, rate, sizeof rate);
	return 0;
}

/* Integration and timing. */

typedef struct {
	int difference, order, extremes;
	double factor, newton, milliseconds;
} Options;

typedef struct {
	int flag;
	long steps, rhs, jacobians;
	Track extremes;
} Outcome;

static void start(const Case *c, double *y) {
	memcpy(y, c->start, 8 * sizeof *y);
	const Switch *both[2] = {&c->high, &c->low};
	for (int k = 0; k < 2; k++) {
		if (both[k]->q >= 0)
			y[both[k]->q] = c->start[8 + k];
		if (both[k]->l >= 0)
			y[both[k]->l] = c->start[10 + k];
	}
}

static void tolerances(const Case *c, double unit, double *atol) {
	double i = fabs(c->load);
	double scale[8] = {i, i, c->vdd, c->bus, c->vdd, c->bus, c->bus, c->vdd};
	const Switch *both[2] = {&c->high, &c->low};
	for (int k = 0; k < 8; k++)
		atol[k] = unit * scale[k];
	for (int k = 0; k < 2; k++) {
		if (both[k]->q >= 0)
			atol[both[k]->q] = unit * i * both[k]->reverse.tau;
		if (both[k]->l >= 0)
			atol[both[k]->l] = unit * i;
	}
}

static int integrate(const Case *c, const Options *o, void *cvode, N_Vector y, N_Vector work, Outcome *out) {
	Track *k = &out->extremes;
	double t = 0;
	start(c, N_VGetArrayPointer(y));
	int flag = CVodeReInit(cvode, 0, y);
	memset(k, 0, sizeof *k);
	signals(c, N_VGetArrayPointer(y), 1, k->value);
	memcpy(k->low, k->value, sizeof k->low);
	memcpy(k->high, k->value, sizeof k->high);
	while (flag >= 0 && t < c->t_end) {
		flag = CVode(cvode, c->t_end, y, &t, CV_ONE_STEP);
		if (flag >= 0 && t > c->t_end) { /* the last step passes the end */
			flag = CVodeGetDky(cvode, c->t_end, 0, y);
			t = c->t_end;
		}
		if (flag >= 0 && o->extremes)
			flag = track(k, c, cvode, t, y, work);
	}
	return flag;
}

static double processor_time(void) {
	struct timespec t;
	clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
	return t.tv_sec + 1e-9 * t.tv_nsec;
}

static void must(int bad, const char *what) {
	if (bad)
		fail("SUNDIALS:", what);
}

static void run(const Case *c, const Options *o, const double *rtol, int count, SUNContext context) {
	N_Vector y = N_VNew_Serial(c->n, context), work = N_VNew_Serial(c->n, context), atol = N_VNew_Serial(c->n, context);
	SUNMatrix a = SUNDenseMatrix(c->n, c->n, context);
	SUNLinearSolver linear = SUNLinSol_Dense(y, a, context);
	N_VEnableFusedOps_Serial(y, SUNTRUE);
	void *cvode = CVodeCreate(CV_BDF, context);
	start(c, N_VGetArrayPointer(y));
	must(!cvode || CVodeInit(cvode, rhs, 0, y) || CVodeSetUserData(cvode, (void *)c), "start");
	tolerances(c, 1e-6, N_VGetArrayPointer(atol));
	must(CVodeSVtolerances(cvode, 1e-4, atol) || CVodeSetLinearSolver(cvode, linear, a), "linear solver");
	must(!o->difference && CVodeSetJacFn(cvode, jacobian), "Jacobian");
	must(CVodeSetMaxOrd(cvode, o->order) || CVodeSetNonlinConvCoef(cvode, o->newton) || CVodeSetErrFile(cvode, NULL), "options");
	for (int n = 0; n < count; n++) {
		Outcome out = {0};
		tolerances(c, o->factor * rtol[n], N_VGetArrayPointer(atol));
		must(CVodeSVtolerances(cvode, rtol[n], atol), "tolerances");
		long extra = 0;
		int repeats = 0;
		double began = processor_time(), spent;
		do {
			out.flag = integrate(c, o, cvode, y, work, &out);
			repeats++;
			spent = processor_time() - began;
		} while (spent < 1e-3 * o->milliseconds);
		must(CVodeGetNumSteps(cvode, &out.steps) || CVodeGetNumRhsEvals(cvode, &out.rhs) || CVodeGetNumLinRhsEvals(cvode, &extra) ||
			CVodeGetNumJacEvals(cvode, &out.jacobians), "counts");
		const double *low = out.extremes.low, *high = out.extremes.high;
		printf("%s\t%g\t%d\t%ld\t%ld\t%ld\t%.3f", c->name, rtol[n], out.flag < 0 ? out.flag : 0, out.steps, out.rhs + extra, out.jacobians, 1e6 * spent / repeats);
		printf("\t%.9g\t%.9g\t%.9g\t%.9g\t%.9g\t%.9g", low[S_NODE], high[S_NODE], low[S_PIN], high[S_PIN], low[S_RAIL], high[S_RAIL]);
		printf("\t%.9g\t%.9g\t%.9g\t%.9g\t%.9g\t%.9g\t%.9g\n", high[S_DS1], high[S_DS2], high[S_GS1], high[S_GS2], low[S_GS1], low[S_GS2], high[S_FLOATING]);
	}
	CVodeFree(&cvode);
	SUNLinSolFree(linear);
	SUNMatDestroy(a);
	N_VDestroy(y);
	N_VDestroy(work);
	N_VDestroy(atol);
}

int main(int argc, char **argv) {
	Options o = {.difference = 0, .order = 5, .extremes = 1, .factor = 0.1, .newton = 0.03, .milliseconds = 20};
	double rtol[64] = {1e-2, 3e-3, 1e-3, 3e-4, 1e-4, 3e-5, 1e-5, 1e-6};
	int count = 0;
	for (int n = 1; n < argc; n++) {
		const char *key = argv[n];
		if (*key != '-') {
			must(count == 64, "too many tolerances");
			rtol[count++] = atof(key);
			continue;
		}
		if (++n == argc)
			fail("no value for", key);
		switch (key[1]) {
		case 'j': o.difference = !strcmp(argv[n], "difference"); break;
		case 'o': o.order = atoi(argv[n]); break;
		case 'a': o.factor = atof(argv[n]); break;
		case 'n': o.newton = atof(argv[n]); break;
		case 'm': o.milliseconds = atof(argv[n]); break;
		case 'p': o.extremes = strcmp(argv[n], "no"); break;
		default: fail("unknown option", key);
		}
	}
	SUNContext context;
	must(SUNContext_Create(NULL, &context), "context");
	printf("name\trtol\tflag\tsteps\trhs\tjacobians\tus\tnode_min\tnode_max\tpin_min\tpin_max\trail_min\trail_max\tv_ds1_max\tv_ds2_max"
		"\tv_gs1_max\tv_gs2_max\tv_gs1_min\tv_gs2_min\tfloating_max\n");
	static Case c;
	while (read_case(&c))
		run(&c, &o, rtol, count ? count : 8, context);
	SUNContext_Free(&context);
	return 0;
}
