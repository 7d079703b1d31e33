/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The well-mixed tank (methods 2.1). Free electrons in liquid argon: lifetime from oxygen
 * (methods 1.1) and drift velocity by the global mobility fit (Li et al., NIM A 816 (2016) 160;
 * methods 1.4), from near zero field to beyond 1 kV/cm, about 87 to 94 K.
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

double purity_time_constant_s(double liquid_kg, double flow_kg_s, double efficiency)
{
    return liquid_kg / (efficiency * flow_kg_s);
}

double purity_steady_fraction(double source_mol_s, double flow_kg_s, double efficiency,
                              double molar_mass_kg_mol)
{
    return source_mol_s * molar_mass_kg_mol / (efficiency * flow_kg_s);
}

int purity_time_to_s(double fraction, double steady, double wanted, double time_constant_s,
                     double *time_s)
{
    double ratio = (fraction - steady) / (wanted - steady);
    if (!(wanted != steady) || !(ratio >= 1) || !isfinite(ratio))
        return ERR_RANGE;
    *time_s = time_constant_s * log(ratio);
    return 0;
}
