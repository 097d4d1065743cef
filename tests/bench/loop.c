/* The steady year of a collector with one cover as a plain compiled loop over the hours: the same equations as the product's,
 * written by hand, to tell how far the vectorised solver is from the limit. Single cover, tilt up to 55 degrees. */
#include <math.h>

typedef struct {
    double gap, exchange, eps_front, cos_tilt, lean, pressure, u_back, u_edge;
    double conductivity, thickness, pitch, outer, inner, bond_resistance;
    double feed, table_start, table_step;
    int table_size, at_inlet;
} Build;

static const double SIGMA = 5.6703744191844294e-8, G = 9.80665, R_AIR = 287.055, PI = 3.14159265358979323846;

typedef struct { double loss, top, slope, residual, shift, follow; } Step;

static Step linearise(const Build *b, double t_air, double h_wind, double radiant, double sun_cover, double t_cover, double t_plate)
{
    double cube = t_cover * t_cover * t_cover, strength = b->eps_front * SIGMA;
    double leaving = h_wind * (t_cover - t_air) + strength * (cube * t_cover - radiant);
    double slope_out = 4.0 * strength * cube + h_wind;

    double x = 0.5 * (t_cover + t_plate) / 300.0, t = 300.0 * x;
    double k = ((9.80276e-4 * x - 6.559526e-3) * x + 3.248843e-2) * x - 5.2476e-4;
    double mu = ((8.345159e-7 * x - 5.550318e-6) * x + 2.30805e-5) * x + 1.725752e-7;
    double cp = (35.16308 * x - 58.92965) * x + 1030.228;
    double k1 = ((3 * 9.80276e-4) * x - 2 * 6.559526e-3) * x / 300 + 3.248843e-2 / 300;
    double mu1 = ((3 * 8.345159e-7) * x - 2 * 5.550318e-6) * x / 300 + 2.30805e-5 / 300;
    double cp1 = (2 * 35.16308 * x - 58.92965) / 300;
    double density = b->pressure / R_AIR;
    double group = G * density * density * cp / (t * t * t * mu * k);
    double group1 = cp1 / cp - mu1 / mu - k1 / k - 3.0 / t;

    double difference = t_plate - t_cover;
    double ra = group * b->gap * b->gap * b->gap * difference * b->cos_tilt;
    double nu = 1.0, climb = 0.0;
    if (ra > 1708.0) {
        double critical = 1708.0 / ra, rise = 1.0 - critical, damped = 1.0 - b->lean * critical;
        nu = 1.0 + 1.44 * rise * damped;
        climb = 1.44 * critical * (damped + b->lean * rise);
        if (ra > 5830.0) {
            double root = cbrt(ra / 5830.0);
            nu += root - 1.0;
            climb += root / 3.0;
        }
    }
    double film = k / b->gap, convection = nu * film * difference;
    double by_difference = film * (nu + climb);
    double by_mean = 0.5 * difference * (nu * k1 / b->gap + film * climb * group1);
    double s = b->exchange * SIGMA, cp3 = t_plate * t_plate * t_plate;
    double arriving = convection + s * (cp3 * t_plate - cube * t_cover);
    double by_upper = -4.0 * s * cube - by_difference + by_mean, by_lower = 4.0 * s * cp3 + by_difference + by_mean;

    double pivot = slope_out - by_upper, u_case = b->u_back + b->u_edge;
    Step step;
    step.residual = sun_cover + arriving - leaving;
    step.shift = step.residual / pivot;
    step.follow = by_lower / pivot;
    step.top = arriving;
    step.loss = arriving + by_upper * step.shift + u_case * (t_plate - t_air);
    step.slope = by_lower + by_upper * step.follow + u_case;
    return step;
}

static double at(const Build *b, const double *table, double t)
{
    double place = (t - b->table_start) / b->table_step;
    if (place <= 0.0) return table[0];
    if (place >= b->table_size - 1) return table[b->table_size - 1];
    int i = (int)place;
    return table[i] + (place - i) * (table[i + 1] - table[i]);
}

/* Useful gain of each hour; hours that lose give 0. Returns the number of evaluations of the network. */
long solve(const Build *b, int n, const double *sun, const double *sun_cover, const double *t_air, const double *h_wind,
           const double *radiant, const double *h_film, const double *capacity, double *useful, double *plate)
{
    long evaluations = 0;
    for (int hour = 0; hour < n; hour++) {
        double u = 4.0 + b->u_back + b->u_edge, u_case = b->u_back + b->u_edge;
        useful[hour] = 0.0;
        plate[hour] = NAN;
        if (sun[hour] + sun_cover[hour] <= u_case * (b->feed - t_air[hour]) && t_air[hour] < b->feed) continue;
        double guess = sun[hour] - u * (b->feed - t_air[hour]);
        double t_plate = b->feed + guess / (35.0 + u), t_cover = t_air[hour] + 0.2857 * (t_plate - t_air[hour]);
        double t_mean = b->feed + fmax(guess, 0.0) * 0.45 / at(b, capacity, b->feed), q = 0.0;
        for (int iteration = 0; iteration < 60; iteration++) {
            Step step = linearise(b, t_air[hour], h_wind[hour], radiant[hour], sun_cover[hour], t_cover, t_plate);
            evaluations++;
            double h = at(b, h_film, t_mean), c = at(b, capacity, t_mean);
            double m = sqrt(step.slope / (b->conductivity * b->thickness)) * 0.5 * (b->pitch - b->outer);
            double fin = tanh(m) / m, span = b->pitch - b->outer;
            double resistance = span * (1.0 - fin) / (step.slope * (b->outer + span * fin))
                + b->pitch * (b->bond_resistance + 1.0 / (PI * b->inner * h));
            double f_prime = 1.0 / (1.0 + step.slope * resistance), ntu = step.slope * f_prime / c;
            double f_r = f_prime * -expm1(-ntu) / ntu;
            double conductance = b->at_inlet ? f_r * step.slope / (1.0 - f_r) : 1.0 / resistance;
            q = conductance * (t_plate - b->feed);
            double loss = step.top + u_case * (t_plate - t_air[hour]);
            if (fabs(sun[hour] - q - loss) < 1e-8 && fabs(step.residual) < 1e-8) break;
            if (iteration < 2 && b->at_inlet) t_mean = t_plate - q * resistance;
            double move = (sun[hour] - q - step.loss) / (step.slope + conductance);
            t_cover += step.shift + step.follow * move;
            t_plate += move;
        }
        useful[hour] = fmax(q, 0.0);
        plate[hour] = t_plate;
    }
    return evaluations;
}
