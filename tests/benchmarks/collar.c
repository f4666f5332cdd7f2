/* One rule, one loop: a weekly collar on many stocks that share one account.
 *
 * Long 100 shares a lot, a call sold at the first listed strike at or above the close, a put bought 4 % below
 * it (snapped down), both to a given expiry and held to it. Decided at a close, filled at the next open. Both
 * options are valued at every close. Prices are (T, N), row-major. Stocks pay no dividend, do not split and
 * do not report: the loop knows none of that. Nothing is remembered but the account and the open positions.
 */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#include "american.h"

#define LOT 100.0
#define DAYS 365.0
#define DUST 1e-9
#define OPEN_TO_CLOSE (6.5 / 24.0)

typedef struct {
    double kappa, ratio, points, skew, curvature, skew_decay, wing, report_moves, floor, cap;
} Smile;

typedef struct {
    double half_spread, spread_rise, floor_ticks, use_ticks, contract_fee, share_fee, trade_fee;
    double assignment_fee, slippage, borrow;
} Costs;

typedef struct {
    double cash, per_position, put_distance;
    int64_t most_positions, most_new, interest, sessions, symbols;
} Account;

typedef struct {
    const double *open, *close, *level, *anchor; /* (T, N) */
    const uint8_t *allowed;                      /* (T, N) */
    const int64_t *ordinal, *expiry;             /* (T,) */
    const double *rate, *low_tick, *high_tick, *threshold, *exercise;
} Tape;

typedef struct {
    double shares, call_strike, put_strike, call_mid, put_mid, lots;
    int64_t expiry;
    int status; /* 0 flat, 1 ordered, 2 open */
} Position;

typedef struct {
    double mid, away;
} Quote;

static double cents(double money) {
    double size = floor(fabs(money) * 100.0 + 0.5) / 100.0;
    return money >= 0.0 ? size : -size;
}

static double pay(double cash, double money) { return cents(cash + cents(money)); }

static double units(double amount, double unit, int direction) { /* 1 up, 2 down */
    double count = amount / unit, nearest = floor(count + 0.5);
    if (fabs(count - nearest) <= DUST * fmax(1.0, fabs(nearest))) return nearest;
    return direction == 1 ? ceil(count) : floor(count);
}

static double grid_step(double price) { /* weekly series */
    if (price < 150.0) return price < 100.0 ? 0.5 : 1.0;
    return price < 500.0 ? 2.5 : 5.0;
}

static double on_tick(double premium, double low, double high, int direction) {
    double tick = premium < 3.0 * (1.0 - DUST) ? low : high;
    if (tick <= 0.0) return premium;
    return floor(units(premium, tick, direction) * tick * 1e4 + 0.5) / 1e4;
}

static double fill(double side, Quote quote, double low, double high, const Costs *costs) {
    double share = costs->half_spread * (1.0 + costs->spread_rise * quote.away);
    double half = fmax(share * quote.mid, costs->floor_ticks * (quote.mid < 3.0 ? low : high));
    double price = side > 0.0 ? quote.mid + half : fmax(0.0, quote.mid - half);
    if (costs->use_ticks == 0.0) return price;
    return on_tick(price, low, high, side > 0.0 ? 1 : 2);
}

static Quote value(const double *exercise, int right, double strike, double days, double spot, double level, double anchor,
                   double rate, const Smile *smile) {
    double years = days / DAYS, pull = smile->kappa * years, base = level;
    double weight = pull > 0.0 ? -expm1(-pull) / pull : 1.0;
    if (weight != 1.0) base = anchor + (level - anchor) * weight;
    double atm = base * smile->ratio + smile->points;
    if (atm < smile->floor) atm = smile->floor;
    if (atm > smile->cap) atm = smile->cap;
    double away = log(strike / spot) - rate * years, deviation = atm * sqrt(years), volatility = atm;
    double deviations = away / deviation;
    if (smile->skew != 0.0 || smile->curvature != 0.0) {
        double scale = smile->skew_decay == 0.0 ? 1.0 : pow(30.0 / fmax(days, 1.0), smile->skew_decay);
        double z = fmin(fmax(deviations, -smile->wing), smile->wing);
        volatility = atm * fmax(0.3, 1.0 + scale * z * (smile->skew + smile->curvature * z));
    }
    double mid = american_or_european(exercise, right, spot, strike, years, rate, volatility);
    Quote quote = {mid, fabs(deviations)};
    return quote;
}

/* What one lot costs with fees, given both quotes; also what the legs trade at. */
static double lot_cost(double spot, Quote call, Quote put, double low, double high, const Costs *costs,
                       double *call_price, double *put_price) {
    *call_price = fill(-1.0, call, low, high, costs);
    *put_price = fill(1.0, put, low, high, costs);
    double credit = LOT * *call_price - LOT * *put_price;
    double fees = costs->share_fee * LOT + 2.0 * costs->contract_fee;
    return fmax(LOT * (spot * (1.0 + costs->slippage)) - credit + fees, spot);
}

/* Walk the whole tape; write equity at every close and return how many positions were opened. */
int64_t collar(const Tape *tape, const Account *account, const Smile *smile, const Costs *costs,
               double *equity_out) {
    int64_t size = account->symbols, opened = 0, open = 0, waiting = 0;
    const double *exercise = tape->exercise;
    Position *positions = calloc((size_t)size, sizeof(Position));
    int64_t *queue = calloc((size_t)size, sizeof(int64_t));
    double cash = account->cash;
    if (!positions || !queue) { free(positions); free(queue); return -1; }
    for (int64_t t = 0; t < account->sessions; t++) {
        const double *opens = tape->open + t * size, *close = tape->close + t * size;
        const double *level = tape->level + t * size, *anchor = tape->anchor + t * size;
        int64_t today = tape->ordinal[t];
        double rate = tape->rate[t], low = tape->low_tick[t], high = tape->high_tick[t];
        if (t > 0 && account->interest) {
            double growth = expm1(tape->rate[t - 1] * (double)(today - tape->ordinal[t - 1]) / DAYS);
            if (growth != 0.0) cash = pay(cash, cash * growth);
        }
        for (int64_t n = 0; n < waiting; n++) { /* orders of yesterday's close */
            int64_t s = queue[n];
            Position *held = &positions[s];
            double spot = opens[s], days = (double)(held->expiry - today) + OPEN_TO_CLOSE;
            double before = tape->rate[t - 1], call_price, put_price;
            Quote call = value(exercise, 0, held->call_strike, days, spot, level[s - size], anchor[s - size], before, smile);
            Quote put = value(exercise, 1, held->put_strike, days, spot, level[s - size], anchor[s - size], before, smile);
            double capital = lot_cost(spot, call, put, low, high, costs, &call_price, &put_price);
            double lots = fmin(held->lots, floor((cash - costs->trade_fee) / capital + 1e-9));
            if (lots < 1.0 || call_price <= 0.0) { held->status = 0; continue; }
            held->status = 2;
            held->shares = LOT * lots;
            double shares_fee = costs->share_fee * held->shares + costs->trade_fee;
            double fee = costs->contract_fee * lots;
            cash = pay(cash, -held->shares * (spot * (1.0 + costs->slippage)) - shares_fee);
            cash = pay(cash, held->shares * call_price - fee);
            cash = pay(cash, -held->shares * put_price - fee);
            open++;
            opened++;
        }
        waiting = 0;
        double stock = 0.0, options = 0.0;
        for (int64_t s = 0; s < size; s++) { /* the close */
            Position *held = &positions[s];
            if (held->status != 2) continue;
            double spot = close[s];
            if (held->expiry <= today) {
                double call_worth = spot - held->call_strike, put_worth = held->put_strike - spot;
                double least = tape->threshold[t] - 1e-9;
                if (call_worth > 0.0 && call_worth >= least) {
                    cash = pay(cash, -costs->assignment_fee);
                    cash = pay(cash, held->shares * held->call_strike);
                } else if (put_worth > 0.0 && put_worth >= least) {
                    cash = pay(cash, -costs->assignment_fee);
                    cash = pay(cash, held->shares * held->put_strike);
                } else {
                    double fee = costs->share_fee * held->shares + costs->trade_fee;
                    cash = pay(cash, held->shares * (spot * (1.0 - costs->slippage)) - fee);
                }
                held->status = 0;
                open--;
                continue;
            }
            double days = (double)(held->expiry - today);
            double call = value(exercise, 0, held->call_strike, days, spot, level[s], anchor[s], rate, smile).mid;
            double put = value(exercise, 1, held->put_strike, days, spot, level[s], anchor[s], rate, smile).mid;
            stock += held->shares * spot;
            options += -held->shares * call + held->shares * put;
        }
        double equity = cash + stock + options, promised = 0.0;
        equity_out[t] = equity;
        int64_t expiry = tape->expiry[t], made = 0;
        for (int64_t s = 0; s < size; s++) { /* entries for the next open */
            Position *held = &positions[s];
            if (held->status != 0 || !tape->allowed[t * size + s] || isnan(level[s]) || expiry == 0) continue;
            if (open + waiting >= account->most_positions || made >= account->most_new) break;
            double spot = close[s], days = (double)(expiry - today), step = grid_step(spot), call_price, put_price;
            held->call_strike = units(spot, step, 1) * step;
            held->put_strike = units(spot * (1.0 + account->put_distance), step, 2) * step;
            held->expiry = expiry;
            Quote call = value(exercise, 0, held->call_strike, days, spot, level[s], anchor[s], rate, smile);
            Quote put = value(exercise, 1, held->put_strike, days, spot, level[s], anchor[s], rate, smile);
            double capital = lot_cost(spot, call, put, low, high, costs, &call_price, &put_price);
            double budget = account->per_position * equity, left = cash - promised - costs->trade_fee;
            double lots = floor(fmin(budget, left) / capital + 1e-9);
            if (lots < 1.0 || call_price <= 0.0) continue; /* nobody buys a call that has no bid */
            held->lots = lots;
            held->status = 1;
            promised += lots * capital;
            queue[waiting++] = s;
            made++;
        }
    }
    free(positions);
    free(queue);
    return opened;
}
