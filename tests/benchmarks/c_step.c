/* The step of the reference physics by hand: one layer between walls, full momentum, limited tracers, no salt.
 *
 * The basin is swept three times a step, row by row; what one row needs of the rows before it stays in line buffers.
 * Arrays are those of the Python side, rows x columns with two ghost cells all round; see numpy_step.py for the equations.
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

typedef double *restrict Row;
typedef const double *restrict ReadRow;

typedef struct {
    long rows, columns;
    double dx, dy, sign, viscosity, diffusivity, wind_ramp, gravity, expansion, slope;
    double mixed_depth, half_length, shoaling_depth, shoaling_time;
    double efficiency, efficiency_scale, floor, margin, outcrop_time;
} Numbers;

typedef struct {
    double *h, *heat, *u, *v;
    double *tx[3], *ty[3], *ax[3], *ay[3], *px[3], *py[3];
    const double *wind_x, *wind_y, *shear_x, *shear_y, *prescribed, *restoring, *target, *entrainment;
    const double *drag_x, *drag_y, *coriolis;
    double *volume_x, *volume_y, *advected_x, *advected_y, *mixed_x, *mixed_y;
    double *upwelled, *shoaled, *entrained, *transformed, *outcrop_volume;
    double *heat_prescribed, *heat_restoring, *outcrop_heat, *limited_faces;
} Fields;

typedef struct {
    double *flux_x, *flux_y, *force_x, *gain, *lines; /* the lines: LINES rows */
} Scratch;

#define LINES 16
#define LARGEST_OUTFLOW 0.9

static inline double larger(double a, double b) { return a > b ? a : b; }
static inline double smaller(double a, double b) { return a < b ? a : b; }

/* Ghost cells ------------------------------------------------------------------------------------------------------ */

static void fill_centres(const Numbers *n, double *a)
{
    const long c = n->columns, last = n->rows - 3;
    for (long j = 2; j <= last; j++) {
        double *r = a + j * c;
        r[0] = r[1] = r[2];
        r[c - 2] = r[c - 1] = r[c - 3];
    }
    for (long g = 0; g < 2; g++) {
        memcpy(a + g * c, a + 2 * c, c * sizeof *a);
        memcpy(a + (last + 1 + g) * c, a + last * c, c * sizeof *a);
    }
}

static void fill_u(const Numbers *n, double *u)
{
    const long c = n->columns, last = n->rows - 3;
    for (long j = 2; j <= last; j++) {
        double *r = u + j * c;
        r[0] = r[1] = r[2] = r[c - 2] = r[c - 1] = 0.0;
    }
    for (long i = 0; i < c; i++) {
        u[i] = u[c + i] = n->sign * u[2 * c + i];
        u[(last + 1) * c + i] = u[(last + 2) * c + i] = n->sign * u[last * c + i];
    }
}

static void fill_v(const Numbers *n, double *v)
{
    const long c = n->columns, last = n->rows - 3;
    memset(v, 0, 3 * c * sizeof *v);
    memset(v + (last + 1) * c, 0, 2 * c * sizeof *v);
    for (long j = 3; j <= last; j++) {
        double *r = v + j * c;
        r[0] = r[1] = n->sign * r[2];
        r[c - 2] = r[c - 1] = n->sign * r[c - 3];
    }
}

/* First sweep: transports and their mean, rotation by v, advection of momentum --------------------------------------- */

/* U = <h> u, V = <h> v of one row, their weighted means, and the mean thickness on its x faces. */
static void transports(long c, const double *w, ReadRow h, ReadRow h_south, ReadRow u, ReadRow v, Row U, Row V, ReadRow U1,
                       ReadRow U2, ReadRow V1, ReadRow V2, Row F, Row G, Row hx)
{
    for (long i = 1; i < c; i++) {
        hx[i] = 0.5 * (h[i - 1] + h[i]);
        U[i] = hx[i] * u[i];
        V[i] = 0.5 * (h_south[i] + h[i]) * v[i];
        F[i] = w[0] * U[i] + w[1] * U1[i] + w[2] * U2[i];
        G[i] = w[0] * V[i] + w[1] * V1[i] + w[2] * V2[i];
    }
}

/* On the corners south of a row: q = zeta/<h> and the rotation f <V>/<h>; K of the row. */
static void corner_terms(long c, double per_dx, double per_dy, double f, ReadRow hx, ReadRow hx_south, ReadRow u,
                         ReadRow u_south, ReadRow v, ReadRow v_north, ReadRow V, Row q, Row turned, Row K)
{
    for (long i = 1; i < c - 1; i++) {
        const double zeta = (v[i] - v[i - 1]) * per_dx - (u[i] - u_south[i]) * per_dy;
        const double per_h = 0.5 / (hx[i] + hx_south[i]);
        q[i] = zeta * per_h;
        turned[i] = f * per_h * (V[i - 1] + V[i]);
        K[i] = 0.25 * (u[i] * u[i] + u[i + 1] * u[i + 1] + v[i] * v[i] + v_north[i] * v_north[i]);
    }
}

static void advect(long c, double per_dx, double per_dy, ReadRow q, ReadRow q_north, ReadRow t, ReadRow t_north, ReadRow K,
                   ReadRow K_south, ReadRow U, ReadRow U_south, ReadRow V, ReadRow V_north, Row du, Row dv, Row force)
{
    for (long i = 2; i < c - 2; i++) {
        force[i] = t[i] + t_north[i];
        du[i] = q[i] * (V[i - 1] + V[i]) + q_north[i] * (V_north[i - 1] + V_north[i]) - (K[i] - K[i - 1]) * per_dx;
        dv[i] = -(q[i] * (U_south[i] + U[i]) + q[i + 1] * (U_south[i + 1] + U[i + 1])) - (K[i] - K_south[i]) * per_dy;
    }
}

static double outflow(long c, double dt_dx, double dt_dy, ReadRow h, ReadRow F, ReadRow G, ReadRow G_north, Row share)
{
    for (long i = 2; i < c - 2; i++) {
        const double leaving = dt_dx * (larger(F[i + 1], 0.0) + larger(-F[i], 0.0));
        share[i] = (leaving + dt_dy * (larger(G_north[i], 0.0) + larger(-G[i], 0.0))) / h[i];
    }
    /* Eight running maxima, or the loop waits for each comparison. */
    double most[8] = {0.0};
    long i = 2;
    for (; i + 8 <= c - 2; i += 8)
        for (int k = 0; k < 8; k++) most[k] = larger(most[k], share[i + k]);
    for (; i < c - 2; i++) most[0] = larger(most[0], share[i]);
    for (int k = 1; k < 8; k++) most[0] = larger(most[0], most[k]);
    return most[0];
}

static double first_sweep(const Numbers *n, const Fields *f, Scratch *s, int now, int before, int earlier, const double *w,
                          double dt)
{
    const long c = n->columns, rows = n->rows;
    const double per_dx = 1.0 / n->dx, per_dy = 1.0 / n->dy;
    double *hx[2] = {s->lines, s->lines + c}, *q[2] = {s->lines + 2 * c, s->lines + 3 * c};
    double *t[2] = {s->lines + 4 * c, s->lines + 5 * c}, *K[2] = {s->lines + 6 * c, s->lines + 7 * c};
    double worst = 0.0;
    for (long j = 1; j < rows - 1; j++) {
        const long a = j * c, b = a - c, at = j & 1, last = 1 - at;
        transports(c, w, f->h + a, f->h + b, f->u + a, f->v + a, f->tx[now] + a, f->ty[now] + a, f->tx[before] + a,
                   f->tx[earlier] + a, f->ty[before] + a, f->ty[earlier] + a, s->flux_x + a, s->flux_y + a, hx[at]);
        if (j > 2)
            worst = larger(worst, outflow(c, dt / n->dx, dt / n->dy, f->h + b, s->flux_x + b, s->flux_y + b, s->flux_y + a,
                                          s->lines + 8 * c));
        if (j > 1) {
            corner_terms(c, per_dx, per_dy, f->coriolis[j], hx[at], hx[last], f->u + a, f->u + b, f->v + a, f->v + a + c,
                         f->ty[now] + a, q[at], t[at], K[at]);
            if (j > 2) /* the row south of this one, whose two corner rows are now known */
                advect(c, per_dx, per_dy, q[last], q[at], t[last], t[at], K[last], s->lines + 9 * c, f->tx[now] + b,
                       f->tx[now] + b - c, f->ty[now] + b, f->ty[now] + a, f->ax[now] + b, f->ay[now] + b, s->force_x + b);
            memcpy(s->lines + 9 * c, K[last], c * sizeof(double));
        }
    }
    return worst;
}

/* Scale down the outflow of cells that would lose too much: rare, so written for shortness. */
static long limit_outflow(const Numbers *n, const Fields *f, Scratch *s, double dt)
{
    const long c = n->columns, rows = n->rows;
    double *share = s->gain;
    long changed = 0;
    memset(share, 0, rows * c * sizeof *share);
    for (long j = 2; j < rows - 2; j++)
        outflow(c, dt / n->dx, dt / n->dy, f->h + j * c, s->flux_x + j * c, s->flux_y + j * c, s->flux_y + (j + 1) * c,
                share + j * c);
    for (long j = 2; j < rows - 2; j++)
        for (long i = 2; i < c - 2; i++)
            for (int along_y = 0; along_y < 2; along_y++) {
                double *flow = (along_y ? s->flux_y : s->flux_x) + j * c + i;
                const double donor = *flow > 0.0 ? share[j * c + i - (along_y ? c : 1)] : share[j * c + i];
                if ((along_y ? j : i) > 2 && donor > LARGEST_OUTFLOW && *flow != 0.0) {
                    *flow *= LARGEST_OUTFLOW / donor;
                    changed++;
                }
            }
    return changed;
}

/* Second sweep: heat and water through the faces --------------------------------------------------------------------- */

/* Flux of heat through one row of faces, booked: `cm2 cm1 | c0 c1` lie behind and beyond the face, per_h likewise. */
static void heat_flux(long first, long end, double dt, double dt_width, double mixing, ReadRow flow, const double *cm2,
                      const double *cm1, const double *c0, const double *c1, const double *hm, const double *h0,
                      const double *per_hm, const double *per_h0, Row advected, Row mixed, Row volume, Row total)
{
    for (long i = first; i < end; i++) {
        const double F = flow[i];
        const int on = F > 0.0;
        /* Both sides are loaded whatever the flow does: a conditional load stops vectorisation. */
        const double a2 = cm2[i], a1 = cm1[i], b0 = c0[i], b1 = c1[i], pm = per_hm[i], p0 = per_h0[i];
        const double courant = fabs(F) * dt_width * (on ? pm : p0);
        const double far = on ? a2 : b1, up = on ? a1 : b0, down = on ? b0 : a1;
        const double behind = up - far, ahead = down - up, sign = ahead > 0.0 ? 1.0 : -1.0;
        const double third = sign * (ahead + 2.0 * behind) * (1.0 / 3.0);
        const double slope = larger(0.0, smaller(smaller(2.0 * sign * behind, third), 2.0 * sign * ahead));
        const double carried = F * (up + 0.5 * (1.0 - courant) * (sign * slope));
        const double diffused = -mixing * (hm[i] + h0[i]) * (b0 - a1);
        advected[i] += dt * carried;
        mixed[i] += dt * diffused;
        volume[i] += dt * F;
        total[i] = carried + diffused;
    }
}

static void concentration(long c, ReadRow h, ReadRow heat, Row theta, Row per_h)
{
    for (long i = 0; i < c; i++) {
        per_h[i] = 1.0 / h[i];
        theta[i] = heat[i] * per_h[i];
    }
}

static void gather(long c, double dt_dx, double dt_dy, ReadRow F, ReadRow G, ReadRow G_north, ReadRow T, ReadRow S,
                   ReadRow S_north, Row h, Row heat)
{
    for (long i = 2; i < c - 2; i++) {
        h[i] -= dt_dx * (F[i + 1] - F[i]) + dt_dy * (G_north[i] - G[i]);
        heat[i] -= dt_dx * (T[i + 1] - T[i]) + dt_dy * (S_north[i] - S[i]);
    }
}

static void second_sweep(const Numbers *n, const Fields *f, Scratch *s, double dt)
{
    const long c = n->columns, rows = n->rows;
    const double mix_x = 0.5 * n->diffusivity / n->dx, mix_y = 0.5 * n->diffusivity / n->dy;
    double *theta[5], *per_h[5], *T = s->lines + 10 * c, *S[2] = {s->lines + 11 * c, s->lines + 12 * c};
    for (int k = 0; k < 5; k++) {
        theta[k] = s->lines + k * c;
        per_h[k] = s->lines + (5 + k) * c;
    }
    for (long j = 0; j < 3; j++) concentration(c, f->h + j * c, f->heat + j * c, theta[j], per_h[j]);
    for (long j = 2; j < rows - 1; j++) { /* the south faces of row j, then the cells of row j - 1 */
        const long a = j * c, b = a - c;
        const double *cc = theta[j % 5], *p = per_h[j % 5];
        if (j < rows - 2) concentration(c, f->h + a + c, f->heat + a + c, theta[(j + 1) % 5], per_h[(j + 1) % 5]);
        /* Beyond the northern wall nothing flows; any neighbour does. */
        const double *beyond = theta[(j < rows - 2 ? j + 1 : j) % 5];
        heat_flux(2, c - 2, dt, dt / n->dy, mix_y, s->flux_y + a, theta[(j + 3) % 5], theta[(j + 4) % 5], cc, beyond,
                  f->h + b, f->h + a, per_h[(j + 4) % 5], p, f->advected_y + a, f->mixed_y + a, f->volume_y + a, S[j & 1]);
        if (j > 2)
            gather(c, dt / n->dx, dt / n->dy, s->flux_x + b, s->flux_y + b, s->flux_y + a, T, S[1 - (j & 1)], S[j & 1],
                   f->h + b, f->heat + b);
        if (j < rows - 2)
            heat_flux(2, c - 1, dt, dt / n->dx, mix_x, s->flux_x + a, cc - 2, cc - 1, cc, cc + 1, f->h + a - 1, f->h + a,
                      p - 1, p, f->advected_x + a, f->mixed_x + a, f->volume_x + a, T);
    }
}

/* Third sweep: pressure, friction, wind, rotation by u, the new velocity ---------------------------------------------- */

static void buoyancy_row(long c, const Numbers *n, ReadRow h, ReadRow heat, Row b, Row P)
{
    for (long i = 0; i < c; i++) {
        const double theta = heat[i] / h[i];
        b[i] = n->gravity * (n->expansion + 0.5 * n->slope * theta) * theta;
        P[i] = 0.5 * h[i] * b[i];
    }
}

/* New velocity on one row of faces; hm, bm, Pm lie behind the face, and `force` holds the rotation. */
static void new_velocity(long first, long c, const double *a, const double *p, double ax, double ay, double per_width,
                         double wind, double dt, const double *h, const double *hm, const double *b, const double *bm,
                         const double *P, const double *Pm, ReadRow force, ReadRow stress, ReadRow drag, ReadRow A0,
                         ReadRow A1, ReadRow A2, ReadRow p1, ReadRow p2, Row p3, const double *old, ReadRow south,
                         ReadRow north, Row u)
{
    for (long i = first; i < c - 2; i++) {
        const double pressure = -(P[i] - Pm[i] + 0.25 * (b[i] + bm[i]) * (h[i] - hm[i])) * per_width;
        const double viscous = ax * (old[i - 1] + old[i + 1] - 2.0 * old[i]) + ay * (south[i] + north[i] - 2.0 * old[i]);
        const double blown = wind * stress[i] / (0.5 * (h[i] + hm[i]));
        const double total = a[0] * A0[i] + a[1] * A1[i] + a[2] * A2[i] + p[0] * pressure + p[1] * p1[i] + p[2] * p2[i]
                             + p[3] * p3[i] + force[i] + viscous + blown;
        p3[i] = pressure;
        u[i] = (old[i] + dt * total) / (1.0 + dt * drag[i]);
    }
}

/* -f <<h u>^y/<h>>^x on one row of y faces. */
static void rotate(long c, double f, ReadRow h, ReadRow h_south, ReadRow u, ReadRow u_south, Row turned, Row force)
{
    for (long i = 2; i < c - 1; i++) {
        const double hx = 0.5 * (h[i - 1] + h[i]), hx_south = 0.5 * (h_south[i - 1] + h_south[i]);
        turned[i] = (hx_south * u_south[i] + hx * u[i]) / (hx + hx_south);
    }
    for (long i = 2; i < c - 2; i++) force[i] = -0.5 * f * (turned[i] + turned[i + 1]);
}

static void third_sweep(const Numbers *n, const Fields *f, Scratch *s, int now, int before, int earlier, const double *a,
                        const double *p, double wind, double dt)
{
    const long c = n->columns, rows = n->rows;
    const double ax = n->viscosity / (n->dx * n->dx), ay = n->viscosity / (n->dy * n->dy);
    double *b[2] = {s->lines, s->lines + c}, *P[2] = {s->lines + 2 * c, s->lines + 3 * c};
    double *old_u[2] = {s->lines + 4 * c, s->lines + 5 * c}, *old_v[2] = {s->lines + 6 * c, s->lines + 7 * c};
    double *turned = s->lines + 8 * c, *force = s->lines + 9 * c;
    memcpy(old_u[1], f->u + c, c * sizeof(double));
    memcpy(old_v[0], f->v + 2 * c, c * sizeof(double));
    for (long j = 2; j < rows - 2; j++) {
        const long r = j * c, at = j & 1, last = 1 - at;
        buoyancy_row(c, n, f->h + r, f->heat + r, b[at], P[at]);
        memcpy(old_u[at], f->u + r, c * sizeof(double));
        new_velocity(3, c, a, p, ax, ay, 1.0 / n->dx, wind, dt, f->h + r, f->h + r - 1, b[at], b[at] - 1, P[at], P[at] - 1,
                     s->force_x + r, f->wind_x + r, f->drag_x + r, f->ax[now] + r, f->ax[before] + r, f->ax[earlier] + r,
                     f->px[before] + r, f->px[earlier] + r, f->px[now] + r, old_u[at], old_u[last], f->u + r + c, f->u + r);
        if (j == 2) continue; /* the southern wall */
        rotate(c, f->coriolis[j], f->h + r, f->h + r - c, f->u + r, f->u + r - c, turned, force);
        memcpy(old_v[at], f->v + r, c * sizeof(double));
        new_velocity(2, c, a, p, ax, ay, 1.0 / n->dy, wind, dt, f->h + r, f->h + r - c, b[at], b[last], P[at], P[last],
                     force, f->wind_y + r, f->drag_y + r, f->ay[now] + r, f->ay[before] + r, f->ay[earlier] + r,
                     f->py[before] + r, f->py[earlier] + r, f->py[now] + r, old_v[at], old_v[last], f->v + r + c, f->v + r);
    }
    fill_u(n, f->u);
    fill_v(n, f->v);
}

#include "c_exchange.h"

void advance(const Numbers *n, const Fields *f, Scratch *s, long steps_done, long history, double start, double dt,
             long exchange_every, long steps, const double *transport_w, const double *advection_w, const double *pressure_w)
{
    long owed = 0; /* Weights: (4, 3), (4, 3), (4, 4): for no step behind us, one, two, and more. */
    fill_centres(n, f->h);
    fill_centres(n, f->heat);
    for (long k = 0; k < steps; k++) {
        const int now = (steps_done + k) % 3, before = (steps_done + k + 2) % 3, earlier = (steps_done + k + 1) % 3;
        const long known = history + k < 3 ? history + k : 3;
        const double time = start + (k + 0.5) * dt;
        const double wind = n->wind_ramp <= 0.0 ? 1.0 : smaller(larger(time / n->wind_ramp, 0.0), 1.0);
        const double worst = first_sweep(n, f, s, now, before, earlier, transport_w + 3 * known, dt);
        if (worst > LARGEST_OUTFLOW) f->limited_faces[0] += limit_outflow(n, f, s, dt);
        second_sweep(n, f, s, dt);
        owed++;
        const int exchanging = owed == exchange_every || k == steps - 1;
        if (exchanging) exchange(n, f, s, wind, owed * dt);
        fill_centres(n, f->h);
        fill_centres(n, f->heat);
        third_sweep(n, f, s, now, before, earlier, advection_w + 3 * known, pressure_w + 4 * known, wind, dt);
        if (exchanging) {
            dilute(n, f, s->gain);
            owed = 0;
        }
    }
}
