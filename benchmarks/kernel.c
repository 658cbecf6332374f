/* The volume kernel of the interaction integral in C, to be measured beside the numba one: the same
   formulas and loops as front3d/methods/nodal_forces.py, for constants that do not vary. */

#include <math.h>
#include <string.h>

typedef struct { double re, im; } cplx;

static inline cplx mul(cplx a, cplx b) { return (cplx){a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re}; }
static inline cplx add(cplx a, cplx b) { return (cplx){a.re + b.re, a.im + b.im}; }
static inline cplx scaled(double f, cplx a) { return (cplx){f * a.re, f * a.im}; }
static inline cplx conj_of(cplx a) { return (cplx){a.re, -a.im}; }

typedef struct {
    long pieces;
    int closed;
    const double *knots, *position, *normal;
} curve_t;

static long locate(double s, const curve_t *curve, double *t, double *beyond) {
    double last = curve->knots[curve->pieces];
    *beyond = 0.0;
    if (curve->closed) s -= floor(s / last) * last;
    else if (s < 0.0) { *beyond = s; s = 0.0; }
    else if (s > last) { *beyond = s - last; s = last; }
    long low = 0, high = curve->pieces - 1;
    while (low < high) {
        long middle = (low + high + 1) / 2;
        if (curve->knots[middle] <= s) low = middle; else high = middle - 1;
    }
    *t = s - curve->knots[low];
    return low;
}

static inline double value(const double *c, double t, int k) { return c[k] + t * (c[3 + k] + t * (c[6 + k] + t * c[9 + k])); }
static inline double slope(const double *c, double t, int k) { return c[3 + k] + t * (2.0 * c[6 + k] + 3.0 * t * c[9 + k]); }
static inline double bend(const double *c, double t, int k) { return 2.0 * c[6 + k] + 6.0 * t * c[9 + k]; }

static double nearest(const double *x, double s, const curve_t *curve) {
    double last = curve->knots[curve->pieces];
    for (int trial = 0; trial < 30; trial++) {
        double t, beyond, f = 0.0, square = 0.0, bent = 0.0;
        const double *c = curve->position + 12 * locate(s, curve, &t, &beyond);
        for (int k = 0; k < 3; k++) {
            double d = slope(c, t, k), gap = x[k] - value(c, t, k) - beyond * d;
            f += gap * d;
            square += d * d;
            bent += gap * bend(c, t, k);
        }
        if (beyond == 0.0 && square > bent) square -= bent;
        double step = f / square;
        s += step;
        if (fabs(step) <= 1e-8 * last) break;
    }
    if (curve->closed) s -= floor(s / last) * last;
    return s;
}

static void frame_at(double s, const curve_t *curve, double *place, double frame[3][3], double *w) {
    double t, beyond, speed = 0.0, along = 0.0, size = 0.0;
    long piece = locate(s, curve, &t, &beyond);
    const double *c = curve->position + 12 * piece, *n = curve->normal + 12 * piece;
    for (int k = 0; k < 3; k++) {
        frame[2][k] = slope(c, t, k);
        speed += frame[2][k] * frame[2][k];
    }
    speed = sqrt(speed);
    for (int k = 0; k < 3; k++) {
        frame[2][k] /= speed;
        place[k] = value(c, t, k) + beyond * frame[2][k];
        along += value(n, t, k) * frame[2][k];
    }
    for (int k = 0; k < 3; k++) {
        frame[1][k] = value(n, t, k) - along * frame[2][k];
        size += frame[1][k] * frame[1][k];
    }
    size = sqrt(size);
    for (int k = 0; k < 3; k++) frame[1][k] /= size;
    for (int k = 0; k < 3; k++) {
        int i = (k + 1) % 3, j = (k + 2) % 3;
        frame[0][k] = frame[1][i] * frame[2][j] - frame[1][j] * frame[2][i];
        w[k] = 0.0;
    }
    if (beyond != 0.0) return;
    for (int k = 0; k < 3; k++) {
        double b = bend(c, t, k) / (speed * speed);
        w[0] -= frame[1][k] * b;
        w[1] += frame[0][k] * b;
        w[2] += frame[0][k] * (b * along - slope(n, t, k) / speed) / size;
    }
}

static void near_tip(double r, double angle, double mu, double nu, double u[3][3], double d1[3][3][2], double d2[3][3][3]) {
    memset(u, 0, 9 * sizeof(double));
    memset(d1, 0, 18 * sizeof(double));
    memset(d2, 0, 27 * sizeof(double));
    double kolosov = 3.0 - 4.0 * nu, scale = 1.0 / (2.0 * mu * sqrt(2.0 * M_PI)), radius = sqrt(r);
    cplx turn = {cos(angle / 2), sin(angle / 2)};
    cplx root = scaled(radius, turn), over_root = scaled(1.0 / radius, conj_of(turn));
    cplx over_z = mul(over_root, over_root), z = mul(root, root);
    cplx root_c = conj_of(root), over_root_c = conj_of(over_root), over_zc = conj_of(over_z);
    cplx gap = {0.0, 2.0 * z.im};
    for (int mode = 0; mode < 2; mode++) {
        cplx K = mode == 0 ? (cplx){1.0, 0.0} : (cplx){0.0, -1.0}, Kc = conj_of(K), minus = {-1.0, 0.0};
        cplx gK = mul(gap, Kc), gz = mul(gK, over_zc);
        cplx v = add(add(scaled(kolosov, mul(K, root)), mul(minus, mul(K, root_c))), scaled(-0.5, mul(gK, over_root_c)));
        cplx dz = scaled(0.5, add(scaled(kolosov, mul(K, over_root)), scaled(-1.0, mul(Kc, over_root_c))));
        cplx dc = scaled(0.5, mul(over_root_c, add(add(Kc, scaled(-1.0, K)), scaled(0.5, gz))));
        cplx dzz = scaled(-0.25 * kolosov, mul(mul(K, over_root), over_z));
        cplx dzc = scaled(0.25, mul(mul(Kc, over_root_c), over_zc));
        cplx dcc = mul(mul(over_root_c, over_zc), add(scaled(0.25, add(K, scaled(-2.0, Kc))), scaled(-0.375, gz)));
        cplx diff = {dz.re - dc.re, dz.im - dc.im}, skew = {dzz.re - dcc.re, dzz.im - dcc.im};
        cplx first = add(dz, dc), second = {-diff.im, diff.re};
        cplx d11 = add(add(dzz, scaled(2.0, dzc)), dcc), d12 = {-skew.im, skew.re};
        cplx d22 = scaled(-1.0, add(add(dzz, scaled(-2.0, dzc)), dcc));
        u[mode][0] = scale * v.re; u[mode][1] = scale * v.im;
        d1[mode][0][0] = scale * first.re; d1[mode][1][0] = scale * first.im;
        d1[mode][0][1] = scale * second.re; d1[mode][1][1] = scale * second.im;
        d2[mode][0][0] = scale * d11.re; d2[mode][1][0] = scale * d11.im;
        d2[mode][0][1] = scale * d12.re; d2[mode][1][1] = scale * d12.im;
        d2[mode][0][2] = scale * d22.re; d2[mode][1][2] = scale * d22.im;
    }
    cplx df = scaled(2.0 * scale, over_root), ddf = scaled(-scale, mul(over_root, over_z));
    u[2][2] = 4.0 * scale * root.im;
    d1[2][2][0] = df.im; d1[2][2][1] = df.re;
    d2[2][2][0] = ddf.im; d2[2][2][1] = ddf.re; d2[2][2][2] = -ddf.im;
}

static void auxiliary(double r, double angle, const double *w, double mu, double nu, double G[3][3][3],
                      double S[3][3][3], double div[3][3], double inc[3][3][2]) {
    double u[3][3], d1[3][3][2], d2[3][3][3];
    near_tip(r, angle, mu, nu, u, d1, d2);
    double lame = 2.0 * mu * nu / (1.0 - 2.0 * nu), x1 = r * cos(angle), x2 = r * sin(angle);
    double h = 1.0 - w[1] * x1 + w[0] * x2;
    for (int m = 0; m < 3; m++) {
        double turned[3] = {w[1] * u[m][2] - w[2] * u[m][1], w[2] * u[m][0] - w[0] * u[m][2], w[0] * u[m][1] - w[1] * u[m][0]};
        for (int i = 0; i < 3; i++) {
            G[m][i][0] = d1[m][i][0];
            G[m][i][1] = d1[m][i][1];
            G[m][i][2] = (turned[i] - w[2] * (x1 * d1[m][i][1] - x2 * d1[m][i][0])) / h;
        }
        for (int k = 0; k < 2; k++) {
            double a = d1[m][0][k], b = d1[m][1][k], c = d1[m][2][k], hk = k == 0 ? -w[1] : w[0];
            double t[3] = {w[1] * c - w[2] * b, w[2] * a - w[0] * c, w[0] * b - w[1] * a};
            for (int i = 0; i < 3; i++) {
                double around = k == 0 ? d1[m][i][1] + x1 * d2[m][i][1] - x2 * d2[m][i][0]
                                       : x1 * d2[m][i][2] - d1[m][i][0] - x2 * d2[m][i][1];
                inc[m][i][k] = (t[i] - w[2] * around - hk * G[m][i][2]) / h;
            }
        }
        double trace = lame * (d1[m][0][0] + d1[m][1][1]), (*s)[3] = S[m];
        s[0][0] = trace + 2.0 * mu * d1[m][0][0];
        s[1][1] = trace + 2.0 * mu * d1[m][1][1];
        s[2][2] = trace;
        s[0][1] = s[1][0] = mu * (d1[m][0][1] + d1[m][1][0]);
        s[0][2] = s[2][0] = mu * d1[m][2][0];
        s[1][2] = s[2][1] = mu * d1[m][2][1];
        for (int i = 0; i < 3; i++) {
            double a, b;
            if (i < 2) { a = mu * d2[m][2][i]; b = mu * d2[m][2][i + 1]; }
            else { a = lame * (d2[m][0][0] + d2[m][1][1]); b = lame * (d2[m][0][1] + d2[m][1][2]); }
            int j = (i + 1) % 3, k = (i + 2) % 3;
            double v = w[j] * s[k][2] - w[k] * s[j][2] + w[0] * s[i][1] - w[1] * s[i][0];
            div[m][i] = (v - w[2] * (x1 * b - x2 * a)) / h;
        }
    }
}

static void pull_of(double P[3][3], const double *T, double factor, double frame[3][3], double local[3][3],
                    int mode, double pull[4][12]) {
    for (int k = 0; k < 3; k++) {
        for (int d = 0; d < 3; d++) {
            double total = 0.0;
            for (int m = 0; m < 3; m++)
                total += frame[m][k] * (P[m][0] * local[d][0] + P[m][1] * local[d][1] + P[m][2] * local[d][2]);
            pull[1 + d][3 * mode + k] = factor * total;
        }
        pull[0][3 * mode + k] = factor * (frame[0][k] * T[0] + frame[1][k] * T[1] + frame[2][k] * T[2]);
    }
}

/* A vector field at nodes, and its derivatives: at[0], and at[1 + d]. */
static inline void interpolate(const double *field, const long *cell, const double *shape, long nodes, double at[4][3]) {
    for (int row = 0; row < 4; row++) {
        double a = 0.0, b = 0.0, c = 0.0;
        for (long n = 0; n < nodes; n++) {
            double weight = shape[row * nodes + n];
            const double *p = field + 3 * cell[n];
            a += weight * p[0];
            b += weight * p[1];
            c += weight * p[2];
        }
        at[row][0] = a; at[row][1] = b; at[row][2] = c;
    }
}

static void eshelby(double stress[3][3], double H[3][3], double S[3][3], double G[3][3], double energy, double P[3][3]) {
    for (int k = 0; k < 3; k++) {
        for (int j = 0; j < 3; j++) {
            double total = 0.0;
            for (int i = 0; i < 3; i++) total += stress[i][j] * G[i][k] + S[i][j] * H[i][k];
            P[k][j] = total;
        }
        P[k][k] -= energy;
    }
}

void cell_forces(const double *points, long n_points, const long *cells, long n_cells, long nodes, const long *side,
                 const double *seed, const double *displacement, long steps, const double *shapes,
                 const double *weights, long n_gauss, const double *knots,
                 const double *position, const double *normal, long pieces, int closed, double mu, double nu,
                 double turn, double *out, long *status) {
    curve_t curve = {pieces, closed, knots, position, normal};
    double lame = 2.0 * mu * nu / (1.0 - 2.0 * nu);
    memset(out, 0, sizeof(double) * n_cells * steps * 4 * nodes * 3);
    for (long c = 0; c < n_cells; c++) {
        const long *cell = cells + c * nodes;
        double s = seed[c];
        status[c] = 0;
        for (long g = 0; g < n_gauss; g++) {
            const double *shape = shapes + g * 4 * nodes;
            double at[4][3], inverse[3][3], det = 0.0, *x = at[0];
            interpolate(points, cell, shape, nodes, at);
            for (int i = 0; i < 3; i++) {
                int a = (i + 1) % 3, b = (i + 2) % 3;
                for (int j = 0; j < 3; j++) {
                    int e = 1 + (j + 1) % 3, f = 1 + (j + 2) % 3;
                    inverse[j][i] = at[e][a] * at[f][b] - at[f][a] * at[e][b];
                }
            }
            for (int d = 0; d < 3; d++) det += at[1 + d][0] * inverse[d][0];
            for (int i = 0; i < 3; i++) for (int j = 0; j < 3; j++) inverse[i][j] /= det;
            if (!(det > 0.0)) { status[c] = 1 + g; break; }
            double place[3], frame[3][3], w[3], local[3][3], x1 = 0.0, x2 = 0.0;
            s = nearest(x, s, &curve);
            frame_at(s, &curve, place, frame, w);
            for (int i = 0; i < 3; i++) {
                w[i] *= turn;
                x1 += (x[i] - place[i]) * frame[0][i];
                x2 += (x[i] - place[i]) * frame[1][i];
            }
            double r = sqrt(x1 * x1 + x2 * x2), angle = atan2(x2, x1);
            if (side[c] > 0 && angle < -0.5 * M_PI) angle += 2.0 * M_PI;
            else if (side[c] < 0 && angle > 0.5 * M_PI) angle -= 2.0 * M_PI;
            for (int d = 0; d < 3; d++)
                for (int j = 0; j < 3; j++)
                    local[d][j] = inverse[d][0] * frame[j][0] + inverse[d][1] * frame[j][1] + inverse[d][2] * frame[j][2];
            double G[3][3][3], S[3][3][3], div[3][3], inc[3][3][2];
            auxiliary(r, angle, w, mu, nu, G, S, div, inc);
            double factor = weights[g] * det;
            for (long step = 0; step < steps; step++) {
                const double *u = displacement + step * n_points * 3;
                double *forces = out + (c * steps + step) * nodes * 12;
                double moved[4][3], H[3][3], stress[3][3], P[3][3], T[3], pull[4][12], energy = 0.0;
                interpolate(u, cell, shape, nodes, moved);
                for (int i = 0; i < 3; i++)
                    for (int j = 0; j < 3; j++) {
                        double total = 0.0;
                        for (int k = 0; k < 3; k++)
                            total += frame[i][k] * (moved[1][k] * local[0][j] + moved[2][k] * local[1][j] + moved[3][k] * local[2][j]);
                        H[i][j] = total;
                    }
                double trace = H[0][0] + H[1][1] + H[2][2];
                for (int i = 0; i < 3; i++)
                    for (int j = 0; j < 3; j++) {
                        double strain = 0.5 * (H[i][j] + H[j][i]);
                        stress[i][j] = 2.0 * mu * strain + (i == j ? lame * trace : 0.0);
                        energy += 0.5 * stress[i][j] * strain;
                    }
                for (int mode = 0; mode < 3; mode++) {
                    double mutual = 0.0;
                    for (int i = 0; i < 3; i++) for (int j = 0; j < 3; j++) mutual += S[mode][i][j] * H[i][j];
                    eshelby(stress, H, S[mode], G[mode], mutual, P);
                    for (int k = 0; k < 3; k++) {
                        T[k] = 0.0;
                        for (int i = 0; i < 3; i++)
                            T[k] += div[mode][i] * H[i][k] + (k < 2 ? stress[i][2] * inc[mode][i][k] : 0.0);
                    }
                    pull_of(P, T, factor, frame, local, mode, pull);
                }
                for (int i = 0; i < 3; i++) for (int j = 0; j < 3; j++) stress[i][j] *= 0.5;
                eshelby(stress, H, stress, H, energy, P);
                T[0] = T[1] = T[2] = 0.0;
                pull_of(P, T, factor, frame, local, 3, pull);
                for (long n = 0; n < nodes; n++) {
                    double v = shape[n], a = shape[nodes + n], b = shape[2 * nodes + n], e = shape[3 * nodes + n];
                    for (int m = 0; m < 12; m++)
                        forces[12 * n + m] += v * pull[0][m] + a * pull[1][m] + b * pull[2][m] + e * pull[3][m];
                }
            }
        }
    }
}
