/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * fluid: properties of pure fluids from the published Helmholtz equations of state, in full.
 * Each function is thread-safe, allocates nothing, and returns 0 or a negative enum err; on an
 * error its output is untouched. err may be NULL. Enthalpy and entropy by the reference state
 * of the cited equation. Everything is SI, per mass, absolute pressure.
 */
#ifndef ULLAGE_FLUID_H
#define ULLAGE_FLUID_H

#include <stdbool.h>
#include <stddef.h>

#include "ullage/base.h"

enum fluid_phase {
    FLUID_PHASE_ANY, /* asked for: whichever is stable */
    FLUID_PHASE_LIQUID,
    FLUID_PHASE_VAPOUR,
    FLUID_PHASE_SUPERCRITICAL, /* above the critical temperature */
    FLUID_PHASE_TWO_PHASE
};
const char *fluid_phase_word(enum fluid_phase phase);

/* A substance: const, one per name. */
struct fluid;
const struct fluid *
fluid_find(const char *name); /* "argon", "nitrogen", ...; NULL if unknown */
size_t fluid_count(void);
const struct fluid *fluid_at(size_t index);
const char *fluid_name(const struct fluid *fluid);

struct fluid_limits {
    double molar_mass_kg_mol;
    double gas_constant_j_mol_k; /* the equation's own, not today's */
    double triple_temperature_k, triple_pressure_pa;
    double critical_temperature_k, critical_pressure_pa, critical_density_kg_m3;
    double max_temperature_k, max_pressure_pa;
    const char *source;      /* of the equation of state */
    const char *uncertainty; /* as stated by its authors */
};
const struct fluid_limits *fluid_limits(const struct fluid *fluid);

/* A state. In the two-phase region density, enthalpy, entropy and internal energy are those of
 * the mixture; cp and sound speed do not exist there and are 0, cv and the pressure derivatives
 * too. At the critical point itself cp is beyond all bounds and 0 stands for it. */
struct fluid_state {
    double temperature_k, pressure_pa, density_kg_m3;
    double enthalpy_j_kg, entropy_j_kg_k, internal_energy_j_kg;
    double cp_j_kg_k, cv_j_kg_k, sound_speed_m_s;
    double dp_dt_pa_k;       /* at constant density */
    double dp_drho_pa_m3_kg; /* at constant temperature */
    double vapour_fraction;  /* by mass: 0 liquid, 1 vapour, between: two phases */
    bool saturated;          /* on the saturation line or between its branches */
    enum fluid_phase phase;
};

/* The state at temperature and pressure. wanted LIQUID or VAPOUR gives that phase also where it
 * is metastable, as far as its spinodal; ANY the stable one. ERR_RANGE outside the equation's
 * validity, in the solid region, or where the wanted phase does not exist. */
int fluid_at_tp(const struct fluid *fluid, double temperature_k, double pressure_pa,
                enum fluid_phase wanted, struct fluid_state *out, struct error *err) MUST_CHECK;
/* The same from a state found before for the same fluid, which may be NULL or out itself: a
 * start for the search, sooner there when it is close by. The result is that of fluid_at_tp to
 * 1e-12. */
int fluid_at_tp_near(const struct fluid *fluid, double temperature_k, double pressure_pa,
                     enum fluid_phase wanted, const struct fluid_state *last,
                     struct fluid_state *out, struct error *err) MUST_CHECK;
/* The stable state at density and temperature; two phases where there are two. */
int fluid_at_rhot(const struct fluid *fluid, double density_kg_m3, double temperature_k,
                  struct fluid_state *out, struct error *err) MUST_CHECK;
/* The stable state at density and internal energy: a closed rigid vessel. */
int fluid_at_rhou(const struct fluid *fluid, double density_kg_m3, double internal_energy_j_kg,
                  struct fluid_state *out, struct error *err) MUST_CHECK;
/* The stable state at pressure and enthalpy, pressure and entropy. */
int fluid_at_ph(const struct fluid *fluid, double pressure_pa, double enthalpy_j_kg,
                struct fluid_state *out, struct error *err) MUST_CHECK;
int fluid_at_ps(const struct fluid *fluid, double pressure_pa, double entropy_j_kg_k,
                struct fluid_state *out, struct error *err) MUST_CHECK;
/* Two phases in equilibrium with a vapour fraction by mass of 0..1. */
int fluid_at_tx(const struct fluid *fluid, double temperature_k, double vapour_fraction,
                struct fluid_state *out, struct error *err) MUST_CHECK;
int fluid_at_px(const struct fluid *fluid, double pressure_pa, double vapour_fraction,
                struct fluid_state *out, struct error *err) MUST_CHECK;

/* Both phases in equilibrium: equal pressure, temperature and Gibbs energy. */
struct fluid_saturation {
    double temperature_k, pressure_pa;
    double dp_dt_pa_k; /* along the line (Clapeyron) */
    struct fluid_state liquid, vapour;
};
/* ERR_RANGE below the triple or above the critical point. */
int fluid_saturation_at_t(const struct fluid *fluid, double temperature_k,
                          struct fluid_saturation *out, struct error *err) MUST_CHECK;
int fluid_saturation_at_p(const struct fluid *fluid, double pressure_pa,
                          struct fluid_saturation *out, struct error *err) MUST_CHECK;

/* ERR_UNSUPPORTED where no model is at hand, ERR_RANGE where it does not apply. */
int fluid_surface_tension(const struct fluid *fluid, double temperature_k, double *tension_n_m,
                          struct error *err) MUST_CHECK;
/* Lemmon, Jacobsen, Int. J. Thermophys. 25 (2004) 21-69: argon, nitrogen, oxygen; one phase. */
int fluid_viscosity(const struct fluid *fluid, const struct fluid_state *state,
                    double *viscosity_pa_s, struct error *err) MUST_CHECK;
int fluid_conductivity(const struct fluid *fluid, const struct fluid_state *state,
                       double *conductivity_w_m_k, struct error *err) MUST_CHECK;

/* (d internal energy / d p) of a closed rigid vessel at a density within the two-phase region,
 * per mass, J/(kg Pa): how much heat a kilogram takes for a pascal. Evaluated from the
 * saturation line's own derivatives. ERR_RANGE outside the region. */
int fluid_du_dp(const struct fluid *fluid, double density_kg_m3, double pressure_pa,
                double *du_dp_j_kg_pa, struct error *err) MUST_CHECK;

/* Isothermal compressibility (1/rho)(drho/dp)_T = 1/(rho dp/drho), 1/Pa, and thermal expansion
 * -(1/rho)(drho/dT)_p = (dp/dT)_rho/(rho dp/drho), 1/K. 0 where they do not exist: in two
 * phases and at the critical point. */
double fluid_compressibility_1_pa(const struct fluid_state *state);
double fluid_expansion_1_k(const struct fluid_state *state);

/* ---- the gas of a hall
 * -----------------------------------------------------------------------
 *
 * Air into which argon, nitrogen or helium was released. Dry air: ISO 2533:1975 (US Standard
 * Atmosphere 1976); ideal gases. Against the equations of state of the pure gases at 101.325
 * kPa the density is right within 0.15 % above 250 K, and within 0.2 % too high to 4.5 % too
 * low (near a gas's boiling point) below. */
struct fluid_air {
    double temperature_k, pressure_pa;
    double humidity; /* relative, 0..1 of saturation over liquid water: of the whole mixture */
    double argon, nitrogen, helium; /* released: mole fractions of the dry mixture */
};
struct fluid_air_state {
    double density_kg_m3, molar_mass_kg_mol;
    double oxygen_pa, nitrogen_pa, argon_pa, helium_pa, water_pa; /* partial pressures */
    double oxygen_dry; /* mole fraction of the dry mixture, as an analyser with a dryer reads */
};
/* ERR_RANGE: a fraction below 0 or a sum above 1, a temperature out of 60 to 400 K, humidity
 * where water is frozen (below 233.15 K) or its vapour exceeds the pressure, pressure out of
 * 1 Pa to 0.3 MPa, and where oxygen, nitrogen or argon would condense by itself. */
int fluid_air_state(const struct fluid_air *air, struct fluid_air_state *out,
                    struct error *err) MUST_CHECK;
/* Vapour pressure of liquid water, 233.15 to 400 K (supercooled below 273.16 K): Wagner, Pruss,
 * J. Phys. Chem. Ref. Data 22 (1993) 783, equation 1; 0.025 % by its authors above the triple
 * point. ERR_RANGE outside. */
int fluid_water_pressure(double temperature_k, double *pressure_pa,
                         struct error *err) MUST_CHECK;

#endif
