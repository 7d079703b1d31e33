/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Free electrons in liquid argon: lifetime from oxygen (methods 1.1) and drift velocity by the
 * global mobility fit (Li et al., NIM A 816 (2016) 160; methods 1.4), from near zero field to
 * beyond 1 kV/cm, about 87 to 94 K.
 */
#include "ullage/balance.h"

#include <math.h>

double purity_lifetime_s(double oxygen_fraction)
{
    return 3.0e-13 / oxygen_fraction;
}

double purity_velocity_m_s(double field_v_m, double temperature_k)
{
    static const double a[] = {551.6, 7158.3, 4440.43, 4.29, 43.63, 0.2053};
    double e = field_v_m / 1e5; /* kV/cm */
    double top = a[0] + a[1] * e + a[2] * pow(e, 1.5) + a[3] * pow(e, 2.5);
    double bottom = 1 + a[1] / a[0] * e + a[4] * e * e + a[5] * e * e * e;
    double mobility = top / bottom * pow(temperature_k / 89, -1.5) * 1e-4; /* m2/(V s) */
    return mobility * field_v_m;
}
