// A simulation for tests: reads a deck of `NAME = value` lines, writes a report. Knows nothing of Drover.
//
// The peaks function (known from the manuals of several numerical packages; from memory):
//   z = 3 (1-x)^2 exp(-x^2 - (y+1)^2) - 10 (x/5 - x^3 - y^5) exp(-x^2 - y^2) - 1/3 exp(-(x+1)^2 - y^2)
//
//   peaks-code DECK [--sleep SECONDS] [--fail-right-of X]
// With --fail-right-of it writes FATAL and ends with code 0, as real codes do, where x is larger.
#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <limits>
#include <thread>

namespace {

bool read_deck(const char* path, double& x, double& y) {
  std::FILE* const deck = std::fopen(path, "r");
  if (deck == nullptr) return false;
  const bool read = std::fscanf(deck, " X = %lf Y = %lf", &x, &y) == 2;
  std::fclose(deck);
  return read;
}

double peaks(double x, double y) {
  return 3.0 * (1.0 - x) * (1.0 - x) * std::exp(-x * x - (y + 1.0) * (y + 1.0)) -
         10.0 * (x / 5.0 - x * x * x - std::pow(y, 5)) * std::exp(-x * x - y * y) -
         std::exp(-(x + 1.0) * (x + 1.0) - y * y) / 3.0;
}

}  // namespace

int main(int argc, char** argv) {
  double x = 0.0, y = 0.0, seconds = 0.0, limit = std::numeric_limits<double>::infinity();
  if (argc < 2 || !read_deck(argv[1], x, y)) return 2;
  for (int i = 2; i + 1 < argc; i += 2) {
    if (std::strcmp(argv[i], "--sleep") == 0) seconds = std::atof(argv[i + 1]);
    if (std::strcmp(argv[i], "--fail-right-of") == 0) limit = std::atof(argv[i + 1]);
  }
  std::this_thread::sleep_for(std::chrono::duration<double>(seconds));
  std::FILE* const report = std::fopen("report.txt", "w");
  if (report == nullptr) return 3;
  if (x > limit) {
    std::fprintf(report, "FATAL: x = %g is beyond the model\n", x);
  } else {
    std::fprintf(report, "HEIGHT = %.17g\nDISTANCE = %.17g\n", peaks(x, y), std::hypot(x, y));
  }
  return std::fclose(report) == 0 ? 0 : 3;
}
