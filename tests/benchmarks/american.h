/* One option on a stock without dividends: the European formula, and the American put where it matters.
 *
 * A put may be exercised early for the interest on its strike. Where that is proven to be worth less than half
 * a cent the European value stands. Else the exercise boundary is found by the fixed point of Andersen, Lake
 * & Offengenden 2016 (Journal of Computational Finance 20, system A) in the depth ln(K/B)/sqrt(t), at a few
 * times, and early exercise is valued by Kim's integral (Review of Financial Studies 3, 1990). How many times
 * and points (NODES, INNER, OUTER) and how many rounds are given to the compiler.
 */
#ifndef AMERICAN_H
#define AMERICAN_H

#include <math.h>

#define ROOT_HALF 0.7071067811865476
#define DENSITY_AT_ZERO 0.3989422804014327
#define HALF_TICK 0.005

static double roots[NODES], half_in[INNER], weight_in[INNER], half_out[OUTER], weight_out[OUTER];
static double marching[NODES][INNER][NODES], together[NODES][INNER][NODES], outward[OUTER][NODES];

static double cdf(double x) { return 0.5 * erfc(-x * ROOT_HALF); }

/* Gauss-Legendre points and weights on [0, 1] by Newton's method on the polynomial. */
static void half_rule(int points, double *half, double *weight) {
    for (int i = 0; i < points; i++) {
        double x = -cos(3.14159265358979323846 * (i + 0.75) / (points + 0.5)), slope = 1.0;
        for (int round = 0; round < 20; round++) {
            double now = x, before = 1.0;
            for (int n = 2; n <= points; n++) {
                double next = ((2 * n - 1) * x * now - (n - 1) * before) / n;
                before = now;
                now = next;
            }
            slope = points * (x * now - before) / (x * x - 1.0);
            x -= now / slope;
        }
        half[i] = 0.5 * (1.0 + x);
        weight[i] = 1.0 / ((1.0 - x * x) * slope * slope);
    }
}

/* Weight of node j of the first `known` in Lagrange interpolation at a place. */
static double lagrange(int known, int j, double place) {
    double product = 1.0;
    for (int k = 0; k < known; k++)
        if (k != j) product *= (place - roots[k]) / (roots[j] - roots[k]);
    return product;
}

static void make_tables(void) {
    half_rule(INNER, half_in, weight_in);
    half_rule(OUTER, half_out, weight_out);
    for (int i = 0; i < NODES; i++) roots[i] = pow((i + 1.0) / NODES, 0.8);
    for (int i = 0; i < NODES; i++)
        for (int k = 0; k < INNER; k++) {
            double left = sqrt(1.0 - half_in[k] * half_in[k]);
            for (int j = 0; j < NODES; j++) {
                marching[i][k][j] = j <= i ? lagrange(i + 1, j, roots[i] * left) * left : 0.0;
                together[i][k][j] = lagrange(NODES, j, roots[i] * left) * left;
            }
        }
    for (int k = 0; k < OUTER; k++) {
        double left = sqrt(1.0 - half_out[k] * half_out[k]);
        for (int j = 0; j < NODES; j++) outward[k][j] = lagrange(NODES, j, left) * left;
    }
}

static double european(int right, double spot, double strike, double years, double rate, double volatility) {
    double owed = rate == 0.0 ? strike : strike * exp(-rate * years);
    double deviation = volatility * sqrt(years), d1 = log(spot / owed) / deviation + 0.5 * deviation;
    double a = d1 * ROOT_HALF, b = (d1 - deviation) * ROOT_HALF;
    double value = right == 0 ? 0.5 * (spot * erfc(-a) - owed * erfc(-b)) : 0.5 * (owed * erfc(b) - spot * erfc(a));
    return value < 0.0 ? 0.0 : value;
}

/* Most that early exercise of a put can add: the interest on the strike, times the best chance to be under it. */
static double put_bound(double spot, double strike, double years, double rate, double volatility) {
    if (rate <= 0.0) return 0.0;
    double time = (1.0 - exp(-rate * years)) / rate, away = log(spot / strike), likely = 1.0;
    if (away > 0.0) {
        double drift = rate - 0.5 * volatility * volatility, when = years;
        if (drift > 0.0) when = fmin(years, away / drift);
        likely = cdf(-(away + drift * when) / (volatility * sqrt(when)));
    }
    return rate * strike * time * likely;
}

/* Depth of the flat boundary of Bjerksund & Stensland 1993, to start from. */
static double first_guess(double years, double rate, double volatility) {
    double variance = volatility * volatility, m = -rate / variance - 0.5;
    double beta = fmax(sqrt(m * m) - m, 1.0001), high = fmax(beta / (beta - 1.0), 1.0001);
    double fall = (2.0 * volatility * sqrt(years) - rate * years) / (high - 1.0);
    return log1p((high - 1.0) * -expm1(-fmax(fall, 1e-8)));
}

/* One Newton step for scaled depth i, over the first `known` nodes. */
static double step(double table[NODES][INNER][NODES], int known, int i, const double *depths, double years,
                   double rate, double volatility) {
    double root = sqrt(years) * roots[i], time = root * root, deviation = volatility * root;
    double depth = depths[i] * root, d2 = (rate * time - depth) / deviation - 0.5 * deviation;
    double front = exp(-rate * time - 0.5 * d2 * d2) * DENSITY_AT_ZERO / deviation;
    double carried = front * exp(depth), above = 0.0, above_slope = 0.0;
    for (int k = 0; k < INNER; k++) {
        double elapsed = time * half_in[k] * half_in[k], span = deviation * half_in[k], inner = 0.0;
        for (int j = 0; j < known; j++) inner += table[i][k][j] * depths[j];
        inner = fmax(inner * root, 0.0);
        double d = (inner - depth + rate * elapsed) / span - 0.5 * span;
        double term = weight_in[k] * exp(-rate * elapsed - 0.5 * d * d);
        above += term;
        above_slope -= term * d * ((1.0 - table[i][k][i]) / span);
    }
    double scale = 2.0 * DENSITY_AT_ZERO * root / volatility;
    double n = front + rate * scale * above, n_slope = -front * d2 / deviation + rate * scale * above_slope;
    double d = carried + cdf(d2 + deviation), d_slope = -carried * d2 / deviation;
    if (!(n > 0.0 && d > 0.0)) return depths[i];
    double slope = fmax(1.0 - n_slope / n + d_slope / d, 0.2);
    double better = depth + (-depth - log(n / d)) / slope;
    return fmin(fmin(fmax(better, 0.25 * depth), 4.0 * depth), 50.0) / root;
}

static void exercise_depths(double *depths, double years, double rate, double volatility) {
    double shortest = years * roots[0] * roots[0], better[NODES];
    depths[0] = first_guess(shortest, rate, volatility) / sqrt(shortest);
    for (int n = 0; n < FIRST_STEPS; n++) depths[0] = step(marching, 1, 0, depths, years, rate, volatility);
    for (int i = 1; i < NODES; i++) {
        depths[i] = i == 1 ? depths[0] : depths[i - 1] * depths[i - 1] / depths[i - 2];
        depths[i] = step(marching, i + 1, i, depths, years, rate, volatility);
    }
    int rounds = rate > 5.0 * volatility * volatility ? HARD_REFINEMENTS : REFINEMENTS;
    for (int n = 0; n < rounds; n++) {
        for (int i = 0; i < NODES; i++) better[i] = step(together, NODES, i, depths, years, rate, volatility);
        for (int i = 0; i < NODES; i++) depths[i] = better[i];
    }
}

static double exercise_premium(double log_moneyness, const double *depths, double years, double rate,
                               double volatility) {
    double root = sqrt(years), total = 0.0;
    for (int k = 0; k < OUTER; k++) {
        double elapsed = years * half_out[k] * half_out[k], depth = 0.0;
        for (int j = 0; j < NODES; j++) depth += outward[k][j] * depths[j];
        double span = volatility * sqrt(elapsed);
        double d2 = (log_moneyness + fmax(depth, 0.0) * root + rate * elapsed) / span - 0.5 * span;
        total += weight_out[k] * half_out[k] * (rate * exp(-rate * elapsed) * cdf(-d2));
    }
    return fmax(2.0 * years * total, 0.0);
}

/* Value of an option, years > 0; a call without dividends is never worth exercising. */
static double american_or_european(int right, double spot, double strike, double years, double rate,
                                   double volatility) {
    double plain = european(right, spot, strike, years, rate, volatility);
    if (right == 0) return plain;
    double most = put_bound(spot, strike, years, rate, volatility);
    if (most < HALF_TICK) return plain;
    double depths[NODES], gain = fmax(strike - spot, 0.0), away = log(spot / strike);
    exercise_depths(depths, years, rate, volatility);
    if (away <= -depths[NODES - 1] * sqrt(years)) return fmax(gain, plain);
    double extra = strike * exercise_premium(away, depths, years, rate, volatility);
    return fmax(plain + fmin(extra, most), gain);
}

#endif
