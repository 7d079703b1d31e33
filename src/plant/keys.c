/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Every section and key of a plant file, one row each. Parser, 'check', help and manual read
 * these rows, so that they cannot disagree.
 */
#include "reader.h"

#include <string.h>

#define AT(draft, member) offsetof(struct draft, member)
#define DIM(name) (1u << DIMENSION_##name)
#define FLOWS (DIM(MASS_FLOW) | DIM(VOLUME_FLOW) | DIM(NORMAL_FLOW))

/* clang-format off */
#define SAYS(draft) \
    {.name = "says", .kind = VALUE_TEXT, .offset = AT(draft, says), .help = "what it is, for people"}

static const struct key site_keys[] = {
    {.name = "name", .kind = VALUE_TEXT, .offset = AT(site, name), .required = true,
     .help = "name of the site, on every screen and report"},
    {.name = "frame", .kind = VALUE_QUANTITY, .offset = AT(site, frame_s), .dimensions = DIM(TIME),
     .low = 0.05, .high = 3600, .fallback = "1 s", .help = "time between two frames"},
    {.name = "barometer", .kind = VALUE_REF, .offset = AT(site, barometer), .dimensions = DIM(PRESSURE),
     .help = "barometric pressure at the plant: a point or a constant; with none, gauge pressures "
             "cannot be made absolute"},
    {.name = "elevation", .kind = VALUE_QUANTITY, .offset = AT(site, elevation_m), .dimensions = DIM(LENGTH),
     .low = -12000, .high = 9000, .fallback = "0 m", .help = "above sea level"},
    {.name = "history", .kind = VALUE_TEXT, .offset = AT(site, history), .fallback = "ullage.db",
     .help = "file of the record"},
    {.name = "rules", .kind = VALUE_TEXT, .offset = AT(site, rules),
     .help = "what prevails over this display, in the site's own words"},
    {.name = "emergency", .kind = VALUE_TEXT, .offset = AT(site, emergency),
     .help = "what to do when the hall is not safe, in the site's own words"},
    {.name = "include", .kind = VALUE_TEXT, .offset = AT(site_draft, include),
     .help = "other files to take in, relative to this one"},
};

static const struct key link_keys[] = {
    SAYS(link),
    {.name = "host", .kind = VALUE_TEXT, .offset = AT(link, host), .required = true,
     .help = "name or address of the device (IPv4 or IPv6)"},
    {.name = "port", .kind = VALUE_INTEGER, .offset = AT(link, port), .low = 1, .high = 65535,
     .fallback = "502", .help = "TCP port"},
    {.name = "unit", .kind = VALUE_INTEGER, .offset = AT(link, unit_id), .low = 0, .high = 255,
     .fallback = "1", .help = "unit identifier; tells devices behind one gateway apart"},
    {.name = "every", .kind = VALUE_QUANTITY, .offset = AT(link, period_s), .dimensions = DIM(TIME),
     .low = 0.05, .high = 3600, .fallback = "1 s", .help = "time between two polls"},
    {.name = "timeout", .kind = VALUE_QUANTITY, .offset = AT(link, timeout_s), .dimensions = DIM(TIME),
     .low = 0.01, .high = 60, .fallback = "500 ms", .help = "longest wait for an answer"},
    {.name = "gap", .kind = VALUE_INTEGER, .offset = AT(link, gap), .low = 0, .high = 124,
     .fallback = "0", .help = "registers that may be read over to join two blocks"},
    {.name = "block", .kind = VALUE_INTEGER, .offset = AT(link, block), .low = 1, .high = 125,
     .fallback = "125", .help = "largest block of registers the device accepts"},
};

static const struct key point_keys[] = {
    SAYS(point),
    {.name = "link", .kind = VALUE_RAW, .offset = AT(point_draft, link), .required = true,
     .help = "the link it is read over"},
    {.name = "read", .kind = VALUE_REGISTER, .offset = AT(point, read), .required = true,
     .help = "TABLE ADDRESS TYPE [ORDER]: input 0 f32; a bit: discrete 12, holding 3 u16.5"},
    {.name = "unit", .kind = VALUE_RAW, .offset = AT(point_draft, unit),
     .help = "unit of the reading; (g) behind a pressure: above the barometer; none for a bit"},
    {.name = "valid", .kind = VALUE_RAW, .offset = AT(point_draft, valid),
     .help = "a .. b: outside it the reading is bad; if left out, any number is valid"},
    {.name = "u", .kind = VALUE_RAW, .offset = AT(point_draft, u),
     .help = "standard uncertainty: absolute, '% of reading', '% of span', or a sum of these, which "
             "combine in quadrature; if left out, 1 % of span where a range is given, else 1 % of "
             "reading"},
    {.name = "stale", .kind = VALUE_RAW, .offset = AT(point_draft, stale),
     .help = "an older reading is stale; if left out, five periods of its link"},
    {.name = "raw", .kind = VALUE_RAW, .offset = AT(point_draft, raw),
     .help = "a .. b: raw numbers that are mapped linearly onto span"},
    {.name = "span", .kind = VALUE_RAW, .offset = AT(point_draft, span),
     .help = "a .. b: the range that raw is mapped onto; also what '% of span' means"},
    {.name = "fault", .kind = VALUE_RAW, .offset = AT(point_draft, fault),
     .help = "device's own fault bit: TABLE ADDRESS [TYPE]; set means bad"},
};

static const struct key vessel_keys[] = {
    SAYS(vessel),
    {.name = "fluid", .kind = VALUE_FLUID, .offset = AT(vessel, fluid), .required = true,
     .help = "what it holds"},
    {.name = "shape", .kind = VALUE_SHAPE, .offset = AT(vessel, shape), .required = true,
     .help = "box L x W x H, upright-cylinder D x H, lying-cylinder D x L, sphere D, or table FILE.csv "
             "(level in m, volume in m3)"},
    {.name = "pressure", .kind = VALUE_REF, .offset = AT(vessel, pressure), .dimensions = DIM(PRESSURE),
     .required = true, .help = "pressure of the vapour"},
    {.name = "level", .kind = VALUE_REF, .offset = AT(vessel, level), .dimensions = DIM(LENGTH) | DIM(NUMBER),
     .help = "liquid level: a length, or a part of the height"},
    {.name = "liquid_temperature", .kind = VALUE_REF_LIST, .offset = AT(vessel, liquid_temperature),
     .dimensions = DIM(TEMPERATURE), .help = "thermometers in the liquid; if none, saturation is taken"},
    {.name = "vapour_temperature", .kind = VALUE_REF, .offset = AT(vessel, vapour_temperature),
     .dimensions = DIM(TEMPERATURE), .help = "thermometer in the vapour; if none, saturation is taken"},
    {.name = "heat_budget", .kind = VALUE_QUANTITY, .offset = AT(vessel, heat_budget_w),
     .dimensions = DIM(POWER), .low = 0, .high = 1e9, .help = "heat load that is allowed for"},
    {.name = "relief", .kind = VALUE_LIMIT, .offset = AT(vessel, relief), .help = "set pressure of the relief"},
    {.name = "window", .kind = VALUE_QUANTITY, .offset = AT(vessel, window_s), .dimensions = DIM(TIME),
     .low = 10, .high = 30 * 86400.0, .fallback = "2 h", .help = "longest averaging window of its balances"},
    {.name = "window_minimum", .kind = VALUE_QUANTITY, .offset = AT(vessel, window_minimum_s),
     .dimensions = DIM(TIME), .low = 5, .high = 30 * 86400.0, .fallback = "10 min",
     .help = "over less than this a balance is not shown"},
};

static const struct key stream_keys[] = {
    SAYS(stream),
    {.name = "from", .kind = VALUE_END, .offset = AT(stream, from), .required = true,
     .help = "where it comes from: a thing, or outside"},
    {.name = "to", .kind = VALUE_END, .offset = AT(stream, to), .required = true,
     .help = "where it goes: a thing, or outside"},
    {.name = "phase", .kind = VALUE_WORD, .offset = AT(stream, phase), .words = "liquid,vapour",
     .required = true, .help = "liquid or vapour"},
    {.name = "fluid", .kind = VALUE_FLUID, .offset = AT(stream, fluid),
     .help = "if left out, that of the things it joins"},
    {.name = "flow", .kind = VALUE_REF, .offset = AT(stream, flow), .dimensions = FLOWS, .required = true,
     .help = "mass flow, volume flow at its temperature and pressure, or normal flow"},
    {.name = "temperature", .kind = VALUE_REF, .offset = AT(stream, temperature),
     .dimensions = DIM(TEMPERATURE), .help = "if left out, saturation at its pressure"},
    {.name = "pressure", .kind = VALUE_REF, .offset = AT(stream, pressure), .dimensions = DIM(PRESSURE),
     .help = "if left out, that of the vessel it joins"},
};

static const struct key condenser_keys[] = {
    SAYS(condenser),
    {.name = "vessel", .kind = VALUE_VESSEL, .offset = AT(condenser, vessel), .required = true,
     .help = "the vessel it cools"},
    {.name = "coolant", .kind = VALUE_FLUID, .offset = AT(condenser, coolant), .required = true,
     .help = "fluid that takes up the heat"},
    {.name = "coolant_flow", .kind = VALUE_REF, .offset = AT(condenser, coolant_flow),
     .dimensions = DIM(MASS_FLOW), .required = true, .help = "its mass flow"},
    {.name = "coolant_in_pressure", .kind = VALUE_REF, .offset = AT(condenser, coolant_in_pressure),
     .dimensions = DIM(PRESSURE), .required = true, .help = "before the valve"},
    {.name = "coolant_in_temperature", .kind = VALUE_REF, .offset = AT(condenser, coolant_in_temperature),
     .dimensions = DIM(TEMPERATURE), .help = "if left out, saturated liquid"},
    {.name = "coolant_out_pressure", .kind = VALUE_REF, .offset = AT(condenser, coolant_out_pressure),
     .dimensions = DIM(PRESSURE), .required = true, .help = "as it leaves"},
    {.name = "coolant_out_temperature", .kind = VALUE_REF, .offset = AT(condenser, coolant_out_temperature),
     .dimensions = DIM(TEMPERATURE), .required = true, .help = "as it leaves; must be superheated vapour"},
    {.name = "rated_duty", .kind = VALUE_QUANTITY, .offset = AT(condenser, rated_duty_w),
     .dimensions = DIM(POWER), .low = 0, .high = 1e9, .help = "what it can do at most"},
};

static const struct key pump_keys[] = {
    SAYS(pump),
    {.name = "vessel", .kind = VALUE_VESSEL, .offset = AT(pump, vessel), .required = true,
     .help = "the vessel it draws from"},
    {.name = "flow", .kind = VALUE_REF, .offset = AT(pump, flow), .dimensions = DIM(MASS_FLOW) | DIM(VOLUME_FLOW),
     .help = "its flow"},
    {.name = "power", .kind = VALUE_REF, .offset = AT(pump, power), .dimensions = DIM(POWER),
     .help = "power that goes into the liquid; then it is no part of the heat load"},
    {.name = "running", .kind = VALUE_REF, .offset = AT(pump, running), .dimensions = DIM(BIT),
     .help = "bit: it runs"},
    {.name = "suction_temperature", .kind = VALUE_REF, .offset = AT(pump, suction_temperature),
     .dimensions = DIM(TEMPERATURE), .help = "of the liquid at its suction; if left out, the vessel's"},
    {.name = "npsh_required", .kind = VALUE_QUANTITY, .offset = AT(pump, npsh_required_m),
     .dimensions = DIM(LENGTH), .low = 0, .high = 1000, .fallback = "0 m", .help = "net positive suction head required"},
    {.name = "suction_depth", .kind = VALUE_QUANTITY, .offset = AT(pump, suction_depth_m),
     .dimensions = DIM(LENGTH), .low = -1000, .high = 1000, .fallback = "0 m",
     .help = "height of the suction above the vessel's floor"},
};

static const struct key purifier_keys[] = {
    SAYS(purifier),
    {.name = "vessel", .kind = VALUE_VESSEL, .offset = AT(purifier, vessel), .required = true,
     .help = "the vessel whose liquid it cleans"},
    {.name = "flow", .kind = VALUE_REF, .offset = AT(purifier, flow), .dimensions = DIM(MASS_FLOW) | DIM(VOLUME_FLOW),
     .help = "liquid through it"},
    {.name = "oxygen_in", .kind = VALUE_REF, .offset = AT(purifier, oxygen_in), .dimensions = DIM(NUMBER),
     .help = "oxygen before it, mole fraction"},
    {.name = "oxygen_out", .kind = VALUE_REF, .offset = AT(purifier, oxygen_out), .dimensions = DIM(NUMBER),
     .help = "oxygen behind it, mole fraction"},
    {.name = "oxygen_capacity", .kind = VALUE_QUANTITY, .offset = AT(purifier, oxygen_capacity_kg),
     .dimensions = DIM(MASS), .low = 0, .high = 1e6, .help = "oxygen it can take up"},
    {.name = "installed", .kind = VALUE_TIME, .offset = AT(purifier, installed_utc_ns),
     .help = "when it was new or last regenerated; its load counts from here"},
    {.name = "target", .kind = VALUE_QUANTITY, .offset = AT(purifier, target), .dimensions = DIM(NUMBER),
     .low = 0, .high = 1, .help = "purity aimed at, mole fraction of oxygen"},
};

static const struct key drift_keys[] = {
    SAYS(drift),
    {.name = "vessel", .kind = VALUE_VESSEL, .offset = AT(drift, vessel), .required = true,
     .help = "the vessel it stands in"},
    {.name = "oxygen", .kind = VALUE_REF, .offset = AT(drift, oxygen), .dimensions = DIM(NUMBER),
     .help = "oxygen in the liquid, mole fraction"},
    {.name = "nitrogen", .kind = VALUE_REF, .offset = AT(drift, nitrogen), .dimensions = DIM(NUMBER),
     .help = "nitrogen in the liquid, mole fraction"},
    {.name = "water", .kind = VALUE_REF, .offset = AT(drift, water), .dimensions = DIM(NUMBER),
     .help = "water in the liquid, mole fraction"},
    {.name = "field", .kind = VALUE_QUANTITY, .offset = AT(drift, field_v_m), .dimensions = DIM(FIELD),
     .low = 1, .high = 1e8, .required = true, .help = "electric field"},
    {.name = "length", .kind = VALUE_QUANTITY, .offset = AT(drift, length_m), .dimensions = DIM(LENGTH),
     .low = 1e-6, .high = 1000, .required = true, .help = "drift length"},
};

static const struct key hall_keys[] = {
    SAYS(hall),
    {.name = "volume", .kind = VALUE_QUANTITY, .offset = AT(hall, volume_m3), .dimensions = DIM(VOLUME),
     .low = 1e-3, .high = 1e9, .required = true, .help = "air in it"},
    {.name = "ventilation", .kind = VALUE_REF, .offset = AT(hall, ventilation), .dimensions = DIM(VOLUME_FLOW),
     .help = "volume flow of fresh air"},
    {.name = "mode", .kind = VALUE_WORD, .offset = AT(hall, mode), .words = "exhaust,supply",
     .fallback = "exhaust", .help = "what the fan does: exhaust draws hall air out, supply blows fresh air in"},
    {.name = "fan_running", .kind = VALUE_REF, .offset = AT(hall, fan_running), .dimensions = DIM(BIT),
     .help = "bit: the fan runs"},
    {.name = "oxygen", .kind = VALUE_REF_LIST, .offset = AT(hall, oxygen), .dimensions = DIM(NUMBER),
     .required = true, .help = "oxygen monitors, mole fraction"},
    {.name = "gas", .kind = VALUE_FLUID, .offset = AT(hall, gas), .required = true,
     .help = "what may be released into it"},
    {.name = "action_levels", .kind = VALUE_RAW, .offset = AT(hall_draft, action_levels),
     .fallback = "19.5 %, 18 %", .help = "oxygen levels at which people act, from high to low"},
    {.name = "occupied", .kind = VALUE_REF, .offset = AT(hall, occupied), .dimensions = DIM(BIT),
     .help = "bit: people are inside"},
    {.name = "temperature", .kind = VALUE_REF, .offset = AT(hall, temperature), .dimensions = DIM(TEMPERATURE),
     .fallback = "20 degC", .help = "of the hall's air"},
    {.name = "fresh_air_oxygen", .kind = VALUE_QUANTITY, .offset = AT(hall, fresh_air_oxygen),
     .dimensions = DIM(NUMBER), .low = 0.1, .high = 0.3, .fallback = "20.95 %", .help = "of the air supplied"},
};

static const struct key shaft_keys[] = {
    SAYS(shaft),
    {.name = "depth", .kind = VALUE_QUANTITY, .offset = AT(shaft, depth_m), .dimensions = DIM(LENGTH),
     .low = 0.1, .high = 12000, .required = true, .help = "from top to bottom"},
    {.name = "pipe", .kind = VALUE_QUANTITY, .offset = AT(shaft, pipe_m), .dimensions = DIM(LENGTH),
     .low = 1e-3, .high = 10, .required = true, .help = "inner diameter"},
    {.name = "roughness", .kind = VALUE_QUANTITY, .offset = AT(shaft, roughness_m), .dimensions = DIM(LENGTH),
     .low = 0, .high = 0.1, .fallback = "0.05 mm", .help = "of its wall"},
    {.name = "gas", .kind = VALUE_FLUID, .offset = AT(shaft, gas), .required = true, .help = "what flows"},
    {.name = "flow", .kind = VALUE_REF, .offset = AT(shaft, flow), .dimensions = FLOWS,
     .help = "flow, downwards positive"},
    {.name = "top_pressure", .kind = VALUE_REF, .offset = AT(shaft, top_pressure), .dimensions = DIM(PRESSURE),
     .required = true, .help = "at its top"},
    {.name = "bottom_pressure", .kind = VALUE_REF, .offset = AT(shaft, bottom_pressure),
     .dimensions = DIM(PRESSURE), .required = true, .help = "at its bottom"},
    {.name = "temperature", .kind = VALUE_REF, .offset = AT(shaft, temperature), .dimensions = DIM(TEMPERATURE),
     .fallback = "20 degC", .help = "mean of the column"},
};

static const struct key delivery_keys[] = {
    SAYS(delivery),
    {.name = "fluid", .kind = VALUE_FLUID, .offset = AT(delivery, fluid), .required = true, .help = "what is delivered"},
    {.name = "oxygen", .kind = VALUE_REF, .offset = AT(delivery, oxygen), .dimensions = DIM(NUMBER), .help = "oxygen in it"},
    {.name = "nitrogen", .kind = VALUE_REF, .offset = AT(delivery, nitrogen), .dimensions = DIM(NUMBER), .help = "nitrogen in it"},
    {.name = "water", .kind = VALUE_REF, .offset = AT(delivery, water), .dimensions = DIM(NUMBER), .help = "water in it"},
    {.name = "oxygen_limit", .kind = VALUE_QUANTITY, .offset = AT(delivery, oxygen_limit), .dimensions = DIM(NUMBER),
     .low = 0, .high = 1, .help = "most that is accepted"},
    {.name = "nitrogen_limit", .kind = VALUE_QUANTITY, .offset = AT(delivery, nitrogen_limit), .dimensions = DIM(NUMBER),
     .low = 0, .high = 1, .help = "most that is accepted"},
    {.name = "water_limit", .kind = VALUE_QUANTITY, .offset = AT(delivery, water_limit), .dimensions = DIM(NUMBER),
     .low = 0, .high = 1, .help = "most that is accepted"},
    {.name = "guard", .kind = VALUE_QUANTITY, .offset = AT(delivery, guard), .dimensions = DIM(NUMBER),
     .low = 0.5, .high = 0.9999, .fallback = "95 %", .help = "probability of conformity asked for (JCGM 106)"},
};

static const struct key alarm_keys[] = {
    SAYS(alarm),
    {.name = "watch", .kind = VALUE_RAW, .offset = AT(alarm_draft, watch), .required = true,
     .help = "a point or a derived quantity"},
    {.name = "above", .kind = VALUE_RAW, .offset = AT(alarm_draft, above), .help = "active above this"},
    {.name = "below", .kind = VALUE_RAW, .offset = AT(alarm_draft, below), .help = "active below this"},
    {.name = "outside", .kind = VALUE_RAW, .offset = AT(alarm_draft, outside), .help = "a .. b: active outside it"},
    {.name = "is", .kind = VALUE_RAW, .offset = AT(alarm_draft, is), .help = "active when it is bad, on or off"},
    {.name = "rising_faster", .kind = VALUE_RAW, .offset = AT(alarm_draft, rising),
     .help = "active when it rises faster: 2 kPa per h"},
    {.name = "falling_faster", .kind = VALUE_RAW, .offset = AT(alarm_draft, falling),
     .help = "active when it falls faster: 0.2 % per min"},
    {.name = "deadband", .kind = VALUE_RAW, .offset = AT(alarm_draft, deadband),
     .help = "it must come back this far before it is normal; if left out, 0"},
    {.name = "on_delay", .kind = VALUE_QUANTITY, .offset = AT(alarm, on_delay_s), .dimensions = DIM(TIME),
     .low = 0, .high = 86400, .fallback = "0 s", .help = "it must last this long to become active"},
    {.name = "off_delay", .kind = VALUE_QUANTITY, .offset = AT(alarm, off_delay_s), .dimensions = DIM(TIME),
     .low = 0, .high = 86400, .fallback = "0 s", .help = "it must be gone this long to become normal"},
    {.name = "priority", .kind = VALUE_INTEGER, .offset = AT(alarm, priority), .low = 1, .high = 4,
     .fallback = "3", .help = "1 highest to 4"},
    {.name = "banner", .kind = VALUE_YES_NO, .offset = AT(alarm, banner), .fallback = "no",
     .help = "yes: also a safety banner"},
    {.name = "consequence", .kind = VALUE_TEXT, .offset = AT(alarm, consequence), .help = "what happens if nothing is done"},
    {.name = "response", .kind = VALUE_TEXT, .offset = AT(alarm, response), .help = "what to do, deferring to site procedure"},
};

#define KEYS(list) .key = list, .key_count = (int)ARRAY_LENGTH(list)
const struct section_kind section_kinds[SECTION_COUNT] = {
    [SECTION_SITE] = {"site", THING_OUTSIDE, sizeof(struct site_draft), KEYS(site_keys), .help = "the plant as a whole"},
    [SECTION_LINK] = {"link", THING_OUTSIDE, sizeof(struct link), KEYS(link_keys), true, "one device on Modbus/TCP"},
    [SECTION_POINT] = {"point", THING_OUTSIDE, sizeof(struct point_draft), KEYS(point_keys), true, "one reading"},
    [SECTION_VESSEL] = {"vessel", THING_VESSEL, sizeof(struct vessel), KEYS(vessel_keys), true, "a vessel of cold liquid"},
    [SECTION_STREAM] = {"stream", THING_STREAM, sizeof(struct stream), KEYS(stream_keys), true, "a flow between two things, or the outside"},
    [SECTION_CONDENSER] = {"condenser", THING_CONDENSER, sizeof(struct condenser), KEYS(condenser_keys), true, "turns a vessel's vapour into liquid again"},
    [SECTION_PUMP] = {"pump", THING_PUMP, sizeof(struct pump), KEYS(pump_keys), true, "a pump in or at a vessel"},
    [SECTION_PURIFIER] = {"purifier", THING_PURIFIER, sizeof(struct purifier), KEYS(purifier_keys), true, "takes oxygen out of the liquid"},
    [SECTION_DRIFT] = {"drift", THING_DRIFT, sizeof(struct drift_draft), KEYS(drift_keys), true, "transport of free electrons in the liquid"},
    [SECTION_HALL] = {"hall", THING_HALL, sizeof(struct hall_draft), KEYS(hall_keys), true, "a room that must stay breathable"},
    [SECTION_SHAFT] = {"shaft", THING_SHAFT, sizeof(struct shaft), KEYS(shaft_keys), true, "a gas riser in a shaft"},
    [SECTION_DELIVERY] = {"delivery", THING_DELIVERY, sizeof(struct delivery), KEYS(delivery_keys), true, "where liquid is delivered"},
    [SECTION_ALARM] = {"alarm", THING_OUTSIDE, sizeof(struct alarm_draft), KEYS(alarm_keys), true, "one alarm"},
};
/* clang-format on */

static void print_dimensions(FILE *out, unsigned dimensions)
{
    const char *separator = "";
    for (int d = 0; d < DIMENSION_COUNT; d++) {
        if ((dimensions & (1u << d)) == 0)
            continue;
        fprintf(out, "%s%s", separator, dimension_says((enum dimension)d));
        separator = " or ";
    }
}

void plant_print_keys(FILE *out)
{
    for (int s = 0; s < SECTION_COUNT; s++) {
        const struct section_kind *kind = &section_kinds[s];
        fprintf(out, "[%s%s]  %s\n", kind->name, kind->named ? " NAME" : "", kind->help);
        for (int k = 0; k < kind->key_count; k++) {
            const struct key *key = &kind->key[k];
            fprintf(out, "  %-24s %s", key->name, key->help);
            if (key->dimensions != 0) {
                fputs(" (", out);
                print_dimensions(out, key->dimensions);
                fputs(")", out);
            }
            if (key->required)
                fputs("; required", out);
            else if (key->fallback != NULL)
                fprintf(out, "; %s if left out", key->fallback);
            fputc('\n', out);
        }
        fputc('\n', out);
    }
}
