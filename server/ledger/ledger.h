// The command loop: one thread that lets requests decide, writes what they decided in group commits, and answers.
//
// A request waits in a queue; the writer takes all that wait (at most kMostInCommit), gives each a savepoint, commits
// once, and only then answers. So an answer is never given before its transaction is on disk (design.md, I1), and a
// request id that was answered once is answered with the same bytes for ever (I4), from the store and not from memory.
//
// When the disk is full the requests concerned get RESOURCE_EXHAUSTED, the memory is loaded anew from the store, and
// the loop goes on. When a sync or a read fails nothing in memory can be trusted: `die` is called (DATA_LOSS).
#pragma once

#include <atomic>
#include <condition_variable>
#include <cstdint>
#include <deque>
#include <functional>
#include <map>
#include <memory>
#include <mutex>
#include <optional>
#include <set>
#include <string>
#include <thread>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "dispatch/times.h"
#include "ledger/handlers.h"
#include "ledger/serialise.h"
#include "ledger/turn.h"
#include "store/store.h"

namespace drover::ledger {

// A request on its way through the loop.
struct Call {
  std::string request_id;  // empty: changes nothing that may not be done twice
  std::string principal;
  std::string digest;  // of the request's content; another one under the same id is refused
  // Decides; the bytes are the answer. Runs on the writer thread.
  std::function<absl::StatusOr<std::string>(Turn&)> decide;
  // Takes the answer after the commit, on the writer thread; must not block.
  std::function<void(absl::StatusOr<std::string>)> answer;
  // For a request that may wait: true when its answer is empty-handed. Set: it is decided anew with every change, until
  // `wait` is over.
  std::function<bool(const std::string&)> empty_handed;
  absl::Duration wait = absl::ZeroDuration();
  // True when nobody waits for the answer any more.
  std::function<bool()> gone;
};

struct Options {
  dispatch::Times times;
  std::map<std::string, std::int32_t> licences;
  std::string version;
  std::function<Now()> clock;
  std::function<std::string()> fresh_token;  // unguessable
  std::function<std::uint64_t()> fresh_seed;
  std::string fingerprint;                       // of the machine
  std::function<void(const absl::Status&)> die;  // must not return
  // After each commit, on the writer thread: studies that changed. Must not block.
  std::function<void(const std::set<std::int64_t>&)> committed = [](const std::set<std::int64_t>&) {};
  // About once a second: whether the disk takes writes.
  std::function<void(bool)> writable = [](bool) {};
  // Makes the loop answer before it commits: the defect that the durability tests must find. Never set by a program.
  bool plant_early_answers_for_test = false;
};

class Ledger {
 public:
  static constexpr int kMostInCommit = 128;

  // Takes over an opened store: raises its term in a commit, loads what is open, starts the writer thread.
  static absl::StatusOr<std::unique_ptr<Ledger>> start(std::unique_ptr<store::Store> store, Options options);
  ~Ledger();
  Ledger(const Ledger&) = delete;
  Ledger& operator=(const Ledger&) = delete;

  // Thread-safe. After drain(): answered UNAVAILABLE.
  void submit(Call call);
  // Answers all that wait, takes no more, checkpoints, ends the thread. Idempotent.
  void drain();

  // --- what other threads may ask; as of the last commit ---
  std::optional<study::Standing> standing(std::int64_t study) const;
  std::vector<std::int64_t> open_studies() const;
  struct StudyFigures {
    std::int32_t workers_busy = 0;
    std::int32_t slots = 0;
  };
  StudyFigures figures(std::int64_t study) const;
  std::vector<v1::Worker> workers() const;
  std::vector<v1::CodeDefinition> codes() const;
  v1::Coordinator coordinator() const;
  absl::Time wall_time() const { return options_.clock().wall; }  // for people and deadlines

 private:
  struct Waiting {
    Call call;
    absl::Duration until;
  };
  struct Done {
    Call call;
    absl::StatusOr<std::string> answer;
    bool written = false;  // has events in the transaction
  };
  Ledger(std::unique_ptr<store::Store> store, Options options);
  absl::Status recover();
  void loop();
  std::vector<Call> take();
  void turn(std::vector<Call> calls);
  void take_turn(Call call, std::vector<Done>& done);
  absl::StatusOr<std::string> decide(Call& call, Turn& turn);
  absl::Status store_answer(const Call& call, const std::string& bytes, Turn& turn);
  void undo(Turn& turn, std::vector<Done>& done, const absl::Status& why);
  void pass_time_in_turn(std::vector<Done>& done);
  void retry_polls(std::vector<Done>& done);
  void finish(std::vector<Done> done);
  void reload();
  void publish();
  void fatal(const absl::Status& status);

  std::unique_ptr<store::Store> store_;
  Options options_;
  std::unique_ptr<State> state_;

  // The turn in progress; writer thread only.
  Now now_;
  absl::Time started_;
  bool in_transaction_ = false;
  bool may_grant_ = false;
  bool disk_ok_ = true;
  std::set<std::int64_t> touched_;
  std::deque<Waiting> polls_;
  absl::Duration next_tick_ = absl::ZeroDuration();
  absl::Duration tick_ = absl::Seconds(1);

  std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<Call> queue_;
  bool ending_ = false;

  mutable std::mutex published_mutex_;
  std::map<std::int64_t, study::Standing> standings_;
  std::map<std::int64_t, StudyFigures> figures_;
  std::map<std::string, v1::Worker> workers_;
  std::vector<v1::CodeDefinition> codes_;
  v1::Coordinator coordinator_;

  std::jthread thread_;
};

// A typed call: `handler` decides, `reply` takes the parsed answer.
template <class Request, class Response>
Call make_call(const Request& request, std::string request_id, std::string principal, std::string digest,
               std::function<absl::StatusOr<Response>(Turn&, const Request&)> handler,
               std::function<void(absl::StatusOr<Response>)> reply) {
  Call call;
  call.request_id = std::move(request_id);
  call.principal = std::move(principal);
  call.digest = std::move(digest);
  call.decide = [request, handler = std::move(handler)](Turn& turn) -> absl::StatusOr<std::string> {
    absl::StatusOr<Response> response = handler(turn, request);
    if (!response.ok()) return response.status();
    return serialise(*response);
  };
  call.answer = [reply = std::move(reply)](absl::StatusOr<std::string> bytes) {
    if (!bytes.ok()) return reply(bytes.status());
    Response response;
    if (!response.ParseFromString(*bytes)) return reply(absl::InternalError("a stored answer cannot be read"));
    reply(std::move(response));
  };
  return call;
}

}  // namespace drover::ledger
