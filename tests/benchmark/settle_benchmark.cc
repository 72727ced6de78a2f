// How many runs a second a ledger settles: 64 workers of one slot, each reporting a run and taking the next in one
// call, with the study's thread asking ahead; real SQLite, real syncs, no RPC.
//
//   settle-benchmark [RUNS]
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <thread>
#include <vector>

#include "server/ledger/bench.h"

namespace drover::ledger {
namespace {

constexpr int kWorkers = 64;

// Takes runs and reports them until there are none; how many it settled.
int work(Bench& bench, const std::string& session, std::atomic<bool>& over) {
  int settled = 0;
  std::vector<v1::Grant> grants;
  while (!over) {
    v1::ReportRequest request;
    request.set_session(session);
    request.set_want(1);
    for (const v1::Grant& grant : grants) *request.add_reports() = evaluated(grant, static_cast<double>(settled));
    const std::string id = session + "/" + std::to_string(settled) + "/" + std::to_string(std::rand());
    const auto bytes = bench.call(grants.empty() ? "" : id, "", [&request](Turn& turn) -> absl::StatusOr<std::string> {
      absl::StatusOr<v1::ReportResponse> response = report(turn, request);
      if (!response.ok()) return response.status();
      return serialise(*response);
    });
    if (!bytes.ok()) return settled;
    settled += static_cast<int>(grants.size());
    v1::ReportResponse response;
    response.ParseFromString(*bytes);
    grants.assign(response.grants().begin(), response.grants().end());
    if (grants.empty()) std::this_thread::sleep_for(std::chrono::milliseconds(1));
  }
  return settled;
}

void measure(std::int64_t runs) {
  Bench bench;
  std::vector<std::string> sessions;
  for (int n = 0; n < kWorkers; ++n) sessions.push_back(bench.session("w" + std::to_string(n), 1));
  v1::StudySpec spec = test_study(runs);
  spec.mutable_search()->set_parallel(2 * kWorkers);
  if (!bench.start(spec).ok()) std::abort();
  std::atomic<bool> over = false;
  const auto begin = std::chrono::steady_clock::now();
  std::vector<std::jthread> threads;
  for (const std::string& session : sessions) threads.emplace_back([&] { work(bench, session, over); });
  while (bench.count("SELECT evaluated FROM study") < runs) std::this_thread::sleep_for(std::chrono::milliseconds(5));
  const std::chrono::duration<double> took = std::chrono::steady_clock::now() - begin;
  over = true;
  threads.clear();
  const auto store = static_cast<double>(std::filesystem::file_size(bench.folder() + "/store.sqlite") +
                                         std::filesystem::file_size(bench.folder() + "/store.sqlite-wal"));
  std::printf("%lld runs in %.2f s: %.0f runs/s, %.0f bytes of store a run\n", static_cast<long long>(runs),
              took.count(), static_cast<double>(runs) / took.count(), store / static_cast<double>(runs));
}

}  // namespace
}  // namespace drover::ledger

int main(int argc, char** argv) {
  drover::ledger::measure(argc > 1 ? std::atoll(argv[1]) : 5000);
  return 0;
}
