// penstock-surge: reads a deck, writes a report.
#include <algorithm>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iostream>
#include <iterator>
#include <optional>
#include <string>
#include <string_view>
#include <system_error>
#include <thread>
#include <variant>

#include "cost.h"
#include "deck.h"
#include "rejection.h"
#include "report.h"
#include "steady.h"

namespace {

constexpr int kDone = 0;
constexpr int kBadInput = 2;

constexpr std::string_view kUsage =
    "usage: penstock-surge DECK [--seconds S]\n"
    "\n"
    "Steady flow, load rejection surge and cost of a penstock with an impulse turbine.\n"
    "\n"
    "  DECK           cards, see README.md; the report goes beside it as DECK with .out\n"
    "                 in place of its ending, or where its card REPORT FILE says\n"
    "  --seconds S    take S seconds in all, 0 to 86400 (default 0: as fast as it can)\n"
    "  --help         this text\n"
    "\n"
    "Exit codes: 0 a report was written (look for FATAL in it), 2 wrong usage, deck or file.\n";

struct Options {
  std::string deck;
  double seconds = 0;
  bool help = false;
};

int refuse(const std::string& message) {
  std::cerr << "penstock-surge: " << message << '\n';
  return kBadInput;
}

std::optional<double> seconds_of(const char* text) {
  char* end = nullptr;
  const double value = std::strtod(text, &end);
  if (end == text || *end != '\0' || !(value >= 0) || value > 86400) return std::nullopt;
  return value;
}

// Options, or what is wrong with them.
std::variant<Options, std::string> options_of(int argc, char** argv) {
  Options options;
  for (int i = 1; i < argc; ++i) {
    const std::string_view argument = argv[i];
    if (argument == "--help") {
      options.help = true;
    } else if (argument == "--seconds") {
      const auto seconds = i + 1 < argc ? seconds_of(argv[++i]) : std::nullopt;
      if (!seconds) return "--seconds takes a number from 0 to 86400";
      options.seconds = *seconds;
    } else if (argument.starts_with('-')) {
      return "unknown option " + std::string(argument) + "; see --help";
    } else if (!options.deck.empty()) {
      return "one deck at a time; " + std::string(argument) + " is a second one";
    } else {
      options.deck = argument;
    }
  }
  if (options.deck.empty() && !options.help) return "no deck given; see --help";
  return options;
}

// Spreads the work over the seconds asked for, in step with the simulated time, telling how far it is.
class Pace {
 public:
  explicit Pace(double seconds) : seconds_(seconds), start_(std::chrono::steady_clock::now()) {}

  void reach(double share) const {
    std::this_thread::sleep_until(start_ + std::chrono::duration_cast<std::chrono::steady_clock::duration>(
                                               std::chrono::duration<double>(seconds_ * std::min(share, 1.0))));
  }
  void tell(double time_s, double duration_s, double peak_mpa) const {
    std::printf("TIME %8.3f S OF %8.3f S   PEAK SO FAR %10.5f\n", time_s, duration_s, peak_mpa);
    std::fflush(stdout);
    reach(time_s / duration_s);
  }

 private:
  double seconds_;
  std::chrono::steady_clock::time_point start_;
};

std::filesystem::path report_path(const std::filesystem::path& deck, const penstock::Case& c) {
  if (c.report_file.empty()) return std::filesystem::path(deck).replace_extension(".out");
  return deck.parent_path() / c.report_file;
}

int solve(const Options& options) {
  const Pace pace(options.seconds);
  std::error_code ignored;
  std::ifstream file(options.deck, std::ios::binary);
  if (!file || std::filesystem::is_directory(options.deck, ignored)) return refuse("cannot read deck " + options.deck);
  const std::string text{std::istreambuf_iterator<char>(file), std::istreambuf_iterator<char>()};
  auto read = penstock::read_deck(text);
  if (const auto* error = std::get_if<penstock::DeckError>(&read)) {
    return refuse(options.deck + ":" + std::to_string(error->line) + ": " + error->message);
  }
  const penstock::Case& c = std::get<penstock::Case>(read);
  const std::filesystem::path path = report_path(options.deck, c);
  if (path == std::filesystem::path(options.deck)) return refuse("the report would overwrite deck " + options.deck);

  const penstock::Steady steady = penstock::steady_state(c);
  const penstock::Rejection rejection = penstock::reject_load(
      c, steady,
      [&pace](double time_s, double duration_s, double peak_mpa) { pace.tell(time_s, duration_s, peak_mpa); });
  pace.reach(1);
  std::ofstream out(path, std::ios::binary);
  out << penstock::report(c, steady, rejection, penstock::cost_of(c));
  out.close();
  if (!out) return refuse("cannot write report " + path.string());
  return kDone;
}

}  // namespace

int main(int argc, char** argv) {
  const auto parsed = options_of(argc, argv);
  if (const auto* message = std::get_if<std::string>(&parsed)) return refuse(*message);
  const Options& options = std::get<Options>(parsed);
  if (options.help) {
    std::cout << kUsage;
    return kDone;
  }
  return solve(options);
}
