#include "ledger/learner.h"

#include <chrono>
#include <future>
#include <optional>
#include <utility>
#include <vector>

#include "absl/strings/str_cat.h"
#include "search/methods.h"
#include "status/try.h"
#include "study/asking.h"
#include "study/bytes.h"
#include "study/cells.h"

namespace drover::ledger {
namespace {

constexpr int kOutcomesAtOnce = 256;

// Settled outcomes, read from the store as a method asks for them.
class StoredHistory final : public search::History {
 public:
  StoredHistory(store::Reader& reader, const study::StudyPlan& plan, std::int64_t study)
      : reader_(reader), plan_(plan), study_(study) {}

  void set_size(std::int64_t size) { size_ = size; }
  std::int64_t size() const override { return size_; }
  absl::StatusOr<search::Outcome> outcome(std::int64_t position) const override {
    DROVER_ASSIGN(const std::vector<store::OutcomeRow> rows, reader_.outcomes(study_, position - 1, 1));
    if (rows.empty() || rows.front().position != position) {
      return absl::NotFoundError(absl::StrCat("no outcome at position ", position));
    }
    return translate(rows.front());
  }
  absl::StatusOr<search::Outcome> translate(const store::OutcomeRow& row) const {
    search::Ask ask;
    ask.number = row.ask;
    DROVER_ASSIGN(ask.point, study::unpack_doubles(row.point));
    return plan_.to_outcome(ask, row.score);
  }

 private:
  store::Reader& reader_;
  const study::StudyPlan& plan_;
  std::int64_t study_;
  std::int64_t size_ = 0;
};

}  // namespace

class Learners::Learner {
 public:
  Learner(std::string folder, Ledger& ledger, std::int64_t study)
      : folder_(std::move(folder)), ledger_(ledger), study_(study), thread_([this] { loop(); }) {}

  ~Learner() {
    {
      const std::lock_guard lock(mutex_);
      stopping_ = true;
    }
    changed_.notify_all();
  }

  void poke() {
    {
      const std::lock_guard lock(mutex_);
      poked_ = true;
    }
    changed_.notify_all();
  }

  bool over() const { return over_; }

 private:
  void loop() {
    while (true) {
      {
        std::unique_lock lock(mutex_);
        // The slots that workers offer may change without an event of this study.
        changed_.wait_for(lock, std::chrono::seconds(1), [this] { return poked_ || stopping_; });
        if (stopping_) return;
        poked_ = false;
      }
      const std::optional<study::Standing> standing = ledger_.standing(study_);
      if (!standing) {  // it has come to its end
        over_ = true;
        return;
      }
      if (standing->state == v1::STUDY_STATE_FAILED) {
        method_.reset();
        continue;
      }
      step(*standing);
    }
  }

  void step(const study::Standing& standing) {
    absl::Status done = method_ ? absl::OkStatus() : load();
    if (done.ok()) done = absorb_and_ask(standing);
    if (done.ok()) return;
    method_.reset();  // ahead of the disk: what is on disk counts
    const bool passing = absl::IsAborted(done) || absl::IsUnavailable(done) || absl::IsResourceExhausted(done);
    if (passing) return;
    static_cast<void>(submit([this, why = std::string(done.message())](Turn& turn) {
      return fail_study(turn, study_, why);
    }));
  }

  absl::Status load() {
    if (!reader_) {
      DROVER_ASSIGN(reader_, store::Reader::open(folder_));
    }
    DROVER_ASSIGN(const store::SearchRow row, reader_->search(study_));
    DROVER_ASSIGN(const std::vector<study::CellValues> cells, study::unpack_cells(row.cells));
    DROVER_ASSIGN(plan_, study::StudyPlan::make(row.spec, row.codes, cells));
    DROVER_ASSIGN(method_, search::make_method(plan_->space(), plan_->settings()));
    history_.emplace(*reader_, *plan_, study_);
    history_->set_size(row.absorbed_through);
    absorbed_ = committed_ = row.absorbed_through;
    asked_ = row.asked;
    if (!row.state.empty()) {
      if (const absl::Status loaded = method_->load(row.state, *history_); !loaded.ok()) {
        method_.reset();
        return loaded;
      }
    }
    return absl::OkStatus();
  }

  absl::Status absorb_and_ask(study::Standing standing) {
    Asked asked;
    asked.study = study_;
    asked.absorbed_before = committed_;
    const bool by_number = standing.order == v1::ORDER_CANDIDATE;
    standing.absorbed = absorbed_;
    standing.asked = asked_;
    // What is open already includes asks of ours that are committed, so the budget is counted right.
    if (by_number) DROVER_TRY(ask(standing, asked));
    DROVER_ASSIGN(std::vector<store::OutcomeRow> rows, reader_->outcomes(study_, absorbed_, kOutcomesAtOnce));
    for (const store::OutcomeRow& row : rows) {
      if (row.position != absorbed_ + 1) break;  // in candidate order an earlier one is still out
      DROVER_ASSIGN(const search::Outcome outcome, history_->translate(row));
      DROVER_TRY(method_->learn(outcome));
      history_->set_size(++absorbed_);
      standing.absorbed = absorbed_;
      if (by_number) DROVER_TRY(ask(standing, asked));
    }
    if (!by_number) DROVER_TRY(ask(standing, asked));
    asked.absorbed_through = absorbed_;
    asked.progress = method_->progress();
    const bool nothing_new = asked.asks.empty() && absorbed_ == committed_;
    const bool turns = asked.dry || asked.progress.converged || standing.deadline_passed ||
                       study::budget_spent(standing) || standing.state == v1::STUDY_STATE_FINISHING;
    const bool told = nothing_new && turns && told_ == std::pair(standing.state, standing.open);
    if ((nothing_new && !turns) || told) return absl::OkStatus();
    told_ = {standing.state, standing.open};
    asked.search_state = method_->save();
    DROVER_TRY(submit([asked](Turn& turn) { return issue_asks(turn, asked); }));
    committed_ = absorbed_;
    if (static_cast<int>(rows.size()) == kOutcomesAtOnce) poke();
    return absl::OkStatus();
  }

  // Asks for as many as are wanted, each in the standing that it is made from.
  absl::Status ask(study::Standing& standing, Asked& asked) {
    const std::int64_t wanted = study::candidates_wanted(standing);
    if (wanted == 0) return absl::OkStatus();
    std::vector<search::Ask> asks = method_->next(static_cast<int>(wanted), *history_);
    const bool all_learned = standing.open == 0 && standing.absorbed == standing.learned;
    asked.dry = asks.empty() && asked.asks.empty() && all_learned;
    for (search::Ask& one : asks) {
      ++asked_;
      ++standing.asked;
      standing.open += standing.runs_per_candidate;
      asked.asks.push_back({std::move(one), absorbed_});
    }
    return absl::OkStatus();
  }

  // Hands a command to the writer and waits for its commit.
  absl::Status submit(std::function<absl::Status(Turn&)> command) {
    auto done = std::make_shared<std::promise<absl::Status>>();
    std::future<absl::Status> committed = done->get_future();
    Call call;
    call.decide = [command = std::move(command)](Turn& turn) -> absl::StatusOr<std::string> {
      DROVER_TRY(command(turn));
      return std::string();
    };
    call.answer = [done](absl::StatusOr<std::string> answer) { done->set_value(answer.status()); };
    ledger_.submit(std::move(call));
    return committed.get();
  }

  std::string folder_;
  Ledger& ledger_;
  std::int64_t study_;

  // Of the thread alone.
  std::unique_ptr<store::Reader> reader_;
  std::unique_ptr<study::StudyPlan> plan_;
  std::unique_ptr<search::SearchMethod> method_;
  std::optional<StoredHistory> history_;
  std::int64_t absorbed_ = 0;   // by the method in memory
  std::int64_t committed_ = 0;  // on disk
  std::int64_t asked_ = 0;
  std::pair<v1::StudyState, std::int64_t> told_{v1::STUDY_STATE_UNSPECIFIED, -1};

  std::mutex mutex_;
  std::condition_variable changed_;
  bool poked_ = true;
  bool stopping_ = false;
  std::atomic<bool> over_ = false;
  std::jthread thread_;  // last: it uses all of the above
};

Learners::Learners(std::string folder, Ledger& ledger) : folder_(std::move(folder)), ledger_(ledger) {
  for (const std::int64_t study : ledger_.open_studies()) poke(study);
}

Learners::~Learners() { stop(); }

void Learners::poke(std::int64_t study) {
  std::vector<std::unique_ptr<Learner>> ended;  // joined after the lock is let go
  const std::lock_guard lock(mutex_);
  if (stopping_) return;
  const auto at = learners_.find(study);
  if (at != learners_.end() && !at->second->over()) return at->second->poke();
  if (at != learners_.end()) {
    ended.push_back(std::move(at->second));
    learners_.erase(at);
  }
  if (ledger_.standing(study)) learners_[study] = std::make_unique<Learner>(folder_, ledger_, study);
}

void Learners::stop() {
  std::map<std::int64_t, std::unique_ptr<Learner>> learners;
  {
    const std::lock_guard lock(mutex_);
    stopping_ = true;
    learners.swap(learners_);
  }
  learners.clear();
}

}  // namespace drover::ledger
