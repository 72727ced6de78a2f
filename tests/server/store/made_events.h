// Events for tests of the store: a study with one variable and its life.
#pragma once

#include <cstdint>
#include <memory>
#include <string>

#include "store/store.h"
#include "study/events.pb.h"

namespace drover::store {

// An empty folder that is removed with it.
class TestFolder {
 public:
  TestFolder();
  ~TestFolder();
  const std::string& path() const { return path_; }

 private:
  std::string path_;
};

StoreOptions test_options();

study::Event code_defined();                       // digest "c0de"
study::Event session_opened(std::int64_t session); // of worker "w1"
study::Event study_started(std::int64_t study);    // "s<study>", one variable, one cell
// Candidate and run number `n` of study 1.
study::Event asks_issued(std::int64_t n);
study::Event granted(std::int64_t run, std::int64_t fence, std::int64_t session = 1);
study::Event settled(std::int64_t run, std::int64_t fence, double value);
study::Event learned(std::int64_t candidate, double value, bool leads);

// In a transaction of its own.
absl::Status append(Store& store, const study::Event& event);
// A store with the code, the session and study 1.
absl::StatusOr<std::unique_ptr<Store>> store_with_study(const std::string& folder);
// One run of study 1 from its ask to its candidate's score.
absl::Status whole_run(Store& store, std::int64_t n, double value);

}  // namespace drover::store
