/* Columns exchanging with air and abyss: a part of c_step.c. */

static double mean_of_decay(double z)
{
    if (z < 0.01) return 1.0 - z * (0.5 - z * (1.0 / 6.0 - z * (1.0 / 24.0 - z * (1.0 / 120.0 - z / 720.0))));
    return -expm1(-z) / z;
}

static double mean_of_dilution(double x)
{
    if (x < 1e-3) return 1.0 - x * (0.5 - x * (1.0 / 3.0 - x * (0.25 - x * 0.2)));
    return log1p(x) / x;
}

static double upwelling_gain(const Numbers *n, double h, double upwelling, double dt)
{
    if (upwelling <= 0.0) return 0.0;
    const double length = n->half_length, up = upwelling * dt, inside = larger(n->mixed_depth - h, 0.0);
    if (up <= inside) return up;
    return inside + length * log1p(exp(-larger(h - n->mixed_depth, 0.0) / length) * (up - inside) / length);
}

static double shoaling_gain(const Numbers *n, double h, double dt)
{
    const double gap = n->shoaling_depth - h;
    if (gap <= 0.0) return 0.0;
    const double x = gap * dt / (n->shoaling_time * n->shoaling_depth);
    return gap * x / (1.0 + x);
}

static double buoyancy(const Numbers *n, double theta)
{
    return n->gravity * (n->expansion + 0.5 * n->slope * theta) * theta;
}

static double outcrop_share(const Numbers *n, double theta, double b)
{
    double x = smaller(theta / n->margin, b / (n->gravity * n->expansion * n->margin));
    x = smaller(larger(x, 0.0), 1.0);
    return x * x * (3.0 - 2.0 * x);
}

static double transformed(const Numbers *n, double h, double theta, double b, double heat, double heating)
{
    const double loss = n->gravity * (n->expansion + n->slope * theta) * heating;
    if (loss >= 0.0 || b <= 0.0 || heat <= 0.0 || n->efficiency == 0.0) return 0.0;
    double efficiency = n->efficiency;
    if (n->efficiency_scale < INFINITY) efficiency *= exp(-theta / n->efficiency_scale);
    const double wanted = smaller(-efficiency * loss / b, -heating * h / heat);
    return larger(smaller(wanted, h - n->floor), 0.0);
}

/* Transport of the mixed layer through one face. */
static inline double mixed_transport(double depth, double h, double u, double sheared)
{
    const double shared = smaller(depth, h);
    return shared * u + (shared - shared * shared / h) * sheared;
}

static void mixed_row(const Numbers *n, long first, double wind, ReadRow h, const double *hm, ReadRow u, ReadRow shear, Row M)
{
    for (long i = first; i < n->columns - 1; i++)
        M[i] = mixed_transport(n->mixed_depth, 0.5 * (hm[i] + h[i]), u[i], wind * shear[i]);
}

static void exchange_column(const Numbers *n, const Fields *f, long at, double upwelling, double dt, double *gain)
{
    const double h0 = f->h[at], heat0 = f->heat[at];
    const double prescribed_gain = f->entrainment[at] * dt;
    const double up = upwelling_gain(n, h0, upwelling, dt), kept = shoaling_gain(n, h0, dt);
    f->entrained[at] += prescribed_gain;
    f->upwelled[at] += up;
    f->shoaled[at] += kept;
    *gain = prescribed_gain + up + kept;

    const double theta = heat0 / h0, b = buoyancy(n, theta);
    const double w = *gain / dt, F = f->prescribed[at], k = f->restoring[at];
    const double dilution = dt / h0 * mean_of_dilution(*gain / h0);
    const double change = (F + k * f->target[at] - (w + k) * theta) * dilution * mean_of_decay((w + k) * dilution);
    double heating = (h0 + *gain) * change + *gain * theta, prescribed = F * dt, destroyed = 0.0;
    if (heating < 0.0) {
        const double wanted = heating;
        heating = larger(heating * outcrop_share(n, theta, b), -larger(heat0, 0.0));
        prescribed *= heating / wanted;
        destroyed = transformed(n, h0 + *gain, theta, b, heat0, heating);
    }
    double h1 = h0 + *gain - destroyed, q1 = heat0 + heating;
    f->heat_prescribed[at] += prescribed;
    f->heat_restoring[at] += heating - prescribed;
    f->transformed[at] -= destroyed;
    const double theta1 = q1 / h1, b1 = buoyancy(n, theta1);
    if (theta1 < n->margin || b1 < n->gravity * n->expansion * n->margin) {
        const double given = (1.0 - outcrop_share(n, theta1, b1)) * dt / (n->outcrop_time + dt);
        const double handed = given * larger(h1 - n->floor, 0.0);
        const double lost = (handed + (b1 < 0.0 ? given * (h1 - handed) : 0.0)) * theta1;
        h1 -= handed;
        q1 -= lost;
        f->outcrop_volume[at] -= handed;
        f->outcrop_heat[at] -= lost;
    }
    f->h[at] = h1;
    f->heat[at] = q1;
}

/* Rows are changed in place from the south: the mixed-layer transport of the northern face is taken first. */
static void exchange(const Numbers *n, const Fields *f, Scratch *s, double wind, double dt)
{
    const long c = n->columns, rows = n->rows;
    double *Mx = s->lines, *My[2] = {s->lines + c, s->lines + 2 * c};
    mixed_row(n, 2, wind, f->h + 2 * c, f->h + c, f->v + 2 * c, f->shear_y + 2 * c, My[0]);
    for (long j = 2; j < rows - 2; j++) {
        const long r = j * c, at = j & 1, north = r + c;
        mixed_row(n, 2, wind, f->h + r, f->h + r - 1, f->u + r, f->shear_x + r, Mx);
        mixed_row(n, 2, wind, f->h + north, f->h + r, f->v + north, f->shear_y + north, My[1 - at]);
        for (long i = 2; i < c - 2; i++) {
            const double upwelling = (Mx[i + 1] - Mx[i]) / n->dx + (My[1 - at][i] - My[at][i]) / n->dy;
            exchange_column(n, f, r + i, upwelling, dt, s->gain + r + i);
        }
    }
}

static void dilute(const Numbers *n, const Fields *f, double *gain)
{
    const long c = n->columns, rows = n->rows;
    fill_centres(n, gain);
    for (long j = 2; j < rows - 2; j++)
        for (long i = 2; i < c - 2; i++) {
            const long at = j * c + i;
            f->u[at] /= 1.0 + (gain[at] + gain[at - 1]) / (f->h[at] + f->h[at - 1]);
            f->v[at] /= 1.0 + (gain[at] + gain[at - c]) / (f->h[at] + f->h[at - c]);
        }
    fill_u(n, f->u);
    fill_v(n, f->v);
}
