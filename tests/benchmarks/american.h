/* One option on a stock without dividends: the European formula, and the American put where it matters.
 *
 * A put may be exercised early for the interest on its strike. Where that is proven to be worth less than half
 * a cent the European value stands. Else what early exercise adds is read by cubic interpolation off the table
 * that the Python kernels read, given as `exercise`: ROWS x COLUMNS x (1 + PLACES), by the fourth root of
 * rate sqrt(t) / volatility, by volatility sqrt(t), and by the distance from the exercise boundary in
 * deviations, stretched near it. Outside the table the value is not a number, so that it would be noticed.
 */
#ifndef AMERICAN_H
#define AMERICAN_H

#include <math.h>

#define ROOT_HALF 0.7071067811865476
#define HALF_TICK 0.005

static double cdf(double x) { return 0.5 * erfc(-x * ROOT_HALF); }

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

/* Weights of the points -1, 0, 1, 2 in cubic interpolation to x. */
static void cubic(double x, double *weight) {
    double low = x * (x - 1.0), high = (x + 1.0) * (x - 2.0);
    weight[0] = -low * (x - 2.0) / 6.0;
    weight[1] = high * (x - 1.0) * 0.5;
    weight[2] = -high * x * 0.5;
    weight[3] = low * (x + 1.0) / 6.0;
}

static int before(double place, int points) {
    int at = (int)place;
    return at < 1 ? 1 : at > points - 3 ? points - 3 : at;
}

/* What early exercise adds, in strikes; negative at or under the boundary. */
static double premium(const double *exercise, double away, double leaning, double deviation) {
    if (!(leaning >= LEAST && leaning <= MOST && deviation >= NARROWEST && deviation <= WIDEST)) return NAN;
    double row = (sqrt(sqrt(leaning)) - FIRST_ROOT) * PER_ROOT, column = (deviation - NARROWEST) * PER_DEVIATION;
    int i = before(row, ROWS), j = before(column, COLUMNS);
    double down[4], across[4], along[4], depth = 0.0, z[4] = {0.0, 0.0, 0.0, 0.0};
    cubic(row - i, down);
    cubic(column - j, across);
    const double *corner = exercise + ((i - 1) * COLUMNS + j - 1) * (1 + PLACES);
    for (int a = 0; a < 4; a++)
        for (int b = 0; b < 4; b++) depth += down[a] * across[b] * corner[(a * COLUMNS + b) * (1 + PLACES)];
    double distance = away / deviation + depth;
    if (distance <= 0.0) return -1.0;
    if (distance >= FARTHEST) return 0.0;
    double place = (sqrt(distance + BEND * BEND) - BEND) * PER_STRETCHED;
    int k = before(place, PLACES);
    cubic(place - k, along);
    for (int a = 0; a < 4; a++)
        for (int b = 0; b < 4; b++) {
            const double *line = corner + (a * COLUMNS + b) * (1 + PLACES) + k;
            double weight = down[a] * across[b];
            for (int c = 0; c < 4; c++) z[c] += weight * line[c];
        }
    return leaning * deviation * cdf(along[0] * z[0] + along[1] * z[1] + along[2] * z[2] + along[3] * z[3]);
}

/* Value of an option, years > 0; a call without dividends is never worth exercising. */
static double american_or_european(const double *exercise, int right, double spot, double strike, double years,
                                   double rate, double volatility) {
    double plain = european(right, spot, strike, years, rate, volatility);
    if (right == 0) return plain;
    double most = put_bound(spot, strike, years, rate, volatility);
    if (most < HALF_TICK) return plain;
    double root = sqrt(years), gain = fmax(strike - spot, 0.0);
    double extra = premium(exercise, log(spot / strike), rate * root / volatility, volatility * root);
    double value = plain + (extra > 0.0 ? fmin(strike * extra, most) : extra < 0.0 ? 0.0 : extra);
    return value < gain ? gain : value;
}

#endif
