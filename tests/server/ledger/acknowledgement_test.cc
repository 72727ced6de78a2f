// Acknowledged means on disk (design.md, I1), and the same request is answered with the same bytes (I4).
#include <gtest/gtest.h>

#include <filesystem>

#include "absl/strings/str_cat.h"
#include "server/ledger/bench.h"
#include "store/store.h"

namespace drover::ledger {
namespace {

// Whether a power cut at this moment would keep the request: the files as they are on disk are copied, and the copy is
// opened as after a crash.
bool survives(const std::string& folder, const std::string& request_id) {
  const std::string copy = folder + ".copy";
  std::filesystem::remove_all(copy);
  std::filesystem::create_directory(copy);
  std::filesystem::permissions(copy, std::filesystem::perms::owner_all);
  for (const char* const name : {"store.sqlite", "store.sqlite-wal"}) {
    if (std::filesystem::exists(folder + "/" + name)) std::filesystem::copy(folder + "/" + name, copy + "/" + name);
  }
  store::StoreOptions options;
  options.fresh_id = "none";
  options.accept_lost_history = true;
  bool found = false;
  {
    auto store = store::Store::open(copy, options);
    // A folder without a lock file of ours but with a store is ours, too.
    found = store.ok() && (*store)->answer_of(request_id).value_or(std::nullopt).has_value();
  }
  std::filesystem::remove_all(copy);
  return found;
}

int lost_acknowledgements(bool early_answers) {
  int lost = 0;
  Bench bench({.early_answers = early_answers, .at_answer = [&lost](const std::string& folder, const std::string& id) {
                 if (!survives(folder, id)) ++lost;
               }});
  EXPECT_TRUE(bench.enrol("w1", 2).ok());
  EXPECT_TRUE(bench.start(test_study(4)).ok());
  return lost;
}

TEST(Acknowledgement, IsGivenAfterTheCommit) { EXPECT_EQ(lost_acknowledgements(false), 0); }

// The check above finds the defect that it is there for: a ledger that answers before it commits.
TEST(Acknowledgement, GivenBeforeTheCommitIsFoundByThisTest) { EXPECT_GT(lost_acknowledgements(true), 0); }

TEST(Acknowledgement, OfTheSameRequestIsTheSameAlsoAfterARestart) {
  Bench bench;
  int decided = 0;
  const auto decide = [&decided](Turn& turn) -> absl::StatusOr<std::string> {
    study::Event event;
    *event.mutable_code_defined()->mutable_definition() = test_code();
    event.mutable_code_defined()->mutable_definition()->set_digest(absl::StrCat("digest ", ++decided));
    const auto emitted = turn.emit(0, std::move(event));
    return emitted.ok() ? absl::StatusOr<std::string>(absl::StrCat("answer ", decided)) : emitted.status();
  };
  EXPECT_EQ(*bench.call("request-1", "digest", decide), "answer 1");
  EXPECT_EQ(*bench.call("request-1", "digest", decide), "answer 1");
  bench.restart();
  EXPECT_EQ(*bench.call("request-1", "digest", decide), "answer 1");
  EXPECT_EQ(decided, 1);
  EXPECT_TRUE(absl::IsAlreadyExists(bench.call("request-1", "other content", decide).status()));
}

TEST(Acknowledgement, OfARefusedRequestLeavesNothing) {
  Bench bench;
  const std::int64_t before = bench.count("SELECT count(*) FROM event");
  const auto refused = bench.call("request-1", "digest", [](Turn& turn) -> absl::StatusOr<std::string> {
    study::Event event;
    *event.mutable_code_defined()->mutable_definition() = test_code();
    EXPECT_TRUE(turn.emit(0, std::move(event)).ok());
    return absl::FailedPreconditionError("changed its mind");
  });
  EXPECT_TRUE(absl::IsFailedPrecondition(refused.status()));
  EXPECT_EQ(bench.count("SELECT count(*) FROM event"), before);
  EXPECT_TRUE(bench.enrol("w1", 1).ok()) << "and the ledger goes on";
}

}  // namespace
}  // namespace drover::ledger
