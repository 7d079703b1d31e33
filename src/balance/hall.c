/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The air of a hall, perfectly mixed (methods 7.3 and 7.4). It informs only: mixing fails where
 * people crouch, and a classification of a space is made by people.
 */
#include "ullage/balance.h"

#include <math.h>

#define MMHG_PA 133.322368

double hall_fatality_factor(double oxygen_pa)
{
    if (oxygen_pa > 0.18 * 101325)
        return 0;
    double factor = pow(10, 6.5 - oxygen_pa / (10 * MMHG_PA));
    return factor > 1 ? 1 : factor;
}

double hall_oxygen_after(enum hall_ventilation ventilation, double volume_m3, double fan_m3_s,
                         double release_m3_s, double fresh, double time_s)
{
    double r = release_m3_s, q = fan_m3_s;
    if (ventilation == HALL_VENTILATION_SUPPLY && q > 0)
        return fresh / (q + r) * (q + r * exp(-(q + r) * time_s / volume_m3));
    if (ventilation == HALL_VENTILATION_EXHAUST && q > r)
        return fresh * (1 - r / q * (1 - exp(-q * time_s / volume_m3)));
    return fresh * exp(-r * time_s / volume_m3);
}

void hall_release(enum hall_ventilation ventilation, double volume_m3, double fan_m3_s,
                  double fresh, double oxygen, double oxygen_rate, struct hall_air *out)
{
    /* Balance of oxygen: supply  V x' = Q fresh - (Q + R) x; exhaust, Q > R, whose room draws
     * Q - R from outside  V x' = (Q - R) fresh - Q x; else the release pushes the air out
     * V x' = -R x. Each solved for R. */
    double q = ventilation == HALL_VENTILATION_OFF ? 0 : fan_m3_s;
    bool drawn = ventilation == HALL_VENTILATION_EXHAUST && q > 0;
    double per = drawn ? fresh : oxygen;
    double release = (q * (fresh - oxygen) - volume_m3 * oxygen_rate) / per;
    if (drawn && release > q) { /* more gas than the fan draws: nothing comes in from outside */
        per = oxygen;
        q = 0;
    }
    out->in_m3_s = q * fresh / per;
    out->out_m3_s = q * oxygen / per;
    out->stored_m3_s = volume_m3 * oxygen_rate / per;
    out->release_m3_s = out->in_m3_s - out->out_m3_s - out->stored_m3_s;
}
