#include "report.h"

#include <algorithm>
#include <cmath>
#include <cstdio>

namespace penstock {
namespace {

template <class... Values>
std::string line(const char* format, Values... values) {
  char text[200];
  std::snprintf(text, sizeof text, format, values...);
  return std::string(text) + '\n';
}

std::string item(const char* name, double value, const char* unit) {
  return line(*unit == '\0' ? " %-24s%12.5E%s" : " %-24s%12.5E %s", name, value, unit);
}

std::string heading(const char* text) { return line("\n %s", text) + ' ' + std::string(48, '-') + '\n'; }

std::string plant(const Case& c, const Steady& s) {
  std::string text = heading("PLANT");
  text += item("LENGTH", c.length_m(), "M") + item("INSIDE DIAMETER", c.diameter_m, "M");
  text += item("WALL", c.wall_mm, "MM") + line(" %-24s%12s", "STEEL", c.steel.substr(0, 40).c_str());
  text += line(" %-24s%12d", "JETS", c.jets) + item("CLOSING IN", c.closing_time_s, "S");
  text += heading("STEADY FLOW");
  text += item("FLOW", s.flow_m3s, "M3/S") + item("VELOCITY", s.velocity_mps, "M/S");
  text += item("REYNOLDS NUMBER", s.reynolds, "") + item("DARCY FRICTION FACTOR", s.friction, "");
  text += item("FRICTION LOSS", s.friction_loss_m, "M") + item("MINOR LOSSES", s.minor_loss_m, "M");
  text += line(" %-24s%12d", "JETS OPEN", s.jets_open) + item("LOAD OF A JET", s.jet_load, "");
  return text;
}

std::string envelope(const Rejection& r) {
  std::string text = heading("HEAD ENVELOPE");
  text += line(" %12s %12s %12s %12s", "STATION M", "ELEVATION M", "HIGHEST M", "LOWEST M");
  const std::size_t last = r.station_m.size() - 1;
  const std::size_t rows = std::min<std::size_t>(last, 20);
  for (std::size_t row = 0; row <= rows; ++row) {
    const std::size_t node = row * last / rows;
    text += line(" %12.2f %12.2f %12.2f %12.2f", r.station_m[node], r.elevation_m[node], r.highest_head_m[node],
                 r.lowest_head_m[node]);
  }
  return text;
}

std::string results(const Steady& s, const Rejection& r, const Cost& cost) {
  std::string text = heading("RESULTS");
  text += item("NET HEAD", s.net_head_m, "M") + item("OVERALL EFFICIENCY", s.efficiency, "");
  text += item("POWER", s.power_kw, "KW") + item("PEAK PRESSURE", r.peak_pressure_mpa, "MPA");
  text += item("LOWEST PRESSURE", r.lowest_pressure_kpa, "KPA") + item("HOOP STRESS", r.hoop_stress_mpa, "MPA");
  text += item("HOOP STRESS LIMIT", r.hoop_limit_mpa, "MPA");
  text += item("STRESS RATIO", r.hoop_stress_mpa / r.hoop_limit_mpa, "");
  text += item("LARGEST CAVITY", r.largest_cavity_m3, "M3") + item("OVERSPEED", r.overspeed_percent, "PERCENT");
  text += item("STEEL MASS", cost.steel_mass_t, "T") + item("CAPITAL COST", cost.capital * 1e-3, "THOUSAND");
  text += item("ANNUAL COST", cost.annual * 1e-3, "THOUSAND A YEAR");
  return text;
}

}  // namespace

std::string report(const Case& c, const Steady& steady, const Rejection& rejection, const Cost& cost) {
  std::string text = line(" PENSTOCK-SURGE 1.0") + line(" %.150s", c.title.c_str()) + plant(c, steady);
  text += heading("LOAD REJECTION");
  text += item("WAVE SPEED", rejection.wave_speed_mps, "M/S") + item("TIME STEP", rejection.step_s, "S");
  text += item("TIME SIMULATED", rejection.duration_s, "S");
  if (!rejection.fatal.empty()) {
    text += line("\n *** FATAL: %s", rejection.fatal.c_str());
    text += item("STRESS THEN", rejection.hoop_stress_mpa, "MPA");
    text += item("STRESS LIMIT", rejection.hoop_limit_mpa, "MPA");
    text += item("CAVITY THEN", rejection.largest_cavity_m3, "M3") + " *** NO RESULTS\n";
    return text;
  }
  text += item("PEAK AT STATION", rejection.peak_station_m, "M") + item("PEAK AT TIME", rejection.peak_time_s, "S");
  text += item("LOWEST AT STATION", rejection.lowest_station_m, "M");
  if (rejection.largest_cavity_m3 > 0) text += " WARNING: A VAPOUR CAVITY OPENED AND CLOSED AGAIN\n";
  return text + envelope(rejection) + results(steady, rejection, cost) + "\n END OF REPORT\n";
}

}  // namespace penstock
