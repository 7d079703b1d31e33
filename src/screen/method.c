/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * How each derived quantity is found, in one sentence, for the panel that tells where a number
 * comes from. The full formulas are in docs/methods.md.
 */
#include "panel.h"

const char *method_says(enum derived_id id)
{
    static const char *const says[] = {
        [DERIVED_VESSEL_LIQUID_MASS] =
            "volume below the level by the vessel's shape, times the liquid's density at its "
            "temperature and the vapour pressure",
        [DERIVED_VESSEL_VAPOUR_MASS] = "the rest of the volume, times the vapour's density",
        [DERIVED_VESSEL_FILL] = "volume below the level by the vessel's shape, over the whole",
        [DERIVED_VESSEL_SATURATION_TEMPERATURE] =
            "the equation of state at the absolute vapour pressure, barometer added",
        [DERIVED_VESSEL_SUBCOOLING] =
            "saturation temperature at the vapour pressure less the mean liquid temperature",
        [DERIVED_VESSEL_HEAT_LOAD] =
            "heat = out with streams + cooling + change of the contents' energy - in with "
            "streams - pump work",
        [DERIVED_VESSEL_HEAT_EXCESS] = "heat load less the budget of the plant file",
        [DERIVED_VESSEL_BOIL_OFF] = "vapour that leaves plus vapour that is stored",
        [DERIVED_VESSEL_BOIL_OFF_DAILY] = "boil-off in a day over the liquid that is there now",
        [DERIVED_VESSEL_MASS_CHANGE] = "change of liquid and vapour mass over the window",
        [DERIVED_VESSEL_MASS_UNEXPLAINED] =
            "in - out - stored over the window; a loss is positive",
        [DERIVED_VESSEL_HOLD_TIME] =
            "closed vessel at the present heat load, liquid and vapour mixed, up to relief. A "
            "layered vessel gets there several times faster: never count on it",
        [DERIVED_VESSEL_PRESSURE_RATE] = "slope of the absolute vapour pressure",
        [DERIVED_VESSEL_OXYGEN_INGRESS] = "oxygen taken out by the purifier plus oxygen stored",
        [DERIVED_VESSEL_PURITY_TIME_CONSTANT] =
            "contents over circulation, well mixed, with the purifier's efficiency",
        [DERIVED_VESSEL_TIME_TO_PURITY] = "well mixed, at the present circulation and ingress",
        [DERIVED_CONDENSER_DUTY] = "coolant flow times its gain of enthalpy",
        [DERIVED_CONDENSER_MARGIN] = "rated duty of the plant file less duty",
        [DERIVED_PUMP_NPSH] = "pressure at the suction less saturation pressure, as a height",
        [DERIVED_PUMP_NPSH_MARGIN] = "head available less head required by the plant file",
        [DERIVED_PURIFIER_OXYGEN_CAPTURED] = "flow times oxygen in less oxygen out, summed",
        [DERIVED_PURIFIER_LOADING] = "oxygen captured over the capacity of the plant file",
        [DERIVED_PURIFIER_EFFICIENCY] = "1 - oxygen behind over oxygen before",
        [DERIVED_PURIFIER_TIME_TO_SPENT] = "capacity left at the present rate of capture",
        [DERIVED_DRIFT_LIFETIME] = "attachment of free electrons to the oxygen that is read",
        [DERIVED_DRIFT_VELOCITY] = "published fit to measured velocities at the field",
        [DERIVED_DRIFT_DRIFT_TIME] = "length over drift velocity",
        [DERIVED_DRIFT_SURVIVING_CHARGE] = "exp(- drift time over lifetime)",
        [DERIVED_HALL_OXYGEN_LOWEST] = "the lowest of the monitors that can be believed",
        [DERIVED_HALL_OXYGEN_PRESSURE] = "lowest oxygen times the barometer",
        [DERIVED_HALL_FATALITY_FACTOR] =
            "by the oxygen pressure, as in quantified-risk practice of US laboratories",
        [DERIVED_HALL_RELEASE] = "gas balance of the hall air, well mixed",
        [DERIVED_HALL_RELEASE_TOTAL] = "release summed over the present episode",
        [DERIVED_HALL_TIME_TO_ACTION] = "to the next action level at the present rate",
        [DERIVED_HALL_SPREAD] = "highest less lowest of the monitors that can be believed",
        [DERIVED_SHAFT_STATIC_GAIN] = "weight of the gas column",
        [DERIVED_SHAFT_FRICTION_LOSS] = "pipe friction at the present flow",
        [DERIVED_SHAFT_UNEXPLAINED] = "bottom less top, less static gain, plus friction loss",
        [DERIVED_SHAFT_RELIQUEFACTION_POWER_MINIMUM] =
            "flow times exergy of the liquid over that of the gas",
        [DERIVED_DELIVERY_VERDICT] = "each reading against its limit, with the guard band",
        [DERIVED_DELIVERY_GUARDED_MARGIN] = "least distance of a reading to its guarded limit",
    };
    _Static_assert(ARRAY_LENGTH(says) == DERIVED_ID_COUNT, "each quantity tells its method");
    return says[id];
}
