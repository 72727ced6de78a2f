// From an order to a running simulation.
#include "session/attempts.h"

#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "code/stage.h"
#include "link/duration.h"
#include "process/attempt_folder.h"
#include "process/launch.h"
#include "session/endings.h"
#include "spdlog/spdlog.h"
#include "status/try.h"

namespace drover::session {
namespace {

constexpr char kAsked[] = "asked to";
constexpr int kThreads = 2;  // a large result that is being read does not hold up the next launch

}  // namespace

absl::StatusOr<std::unique_ptr<Attempts>> Attempts::start(Tools tools) {
  std::unique_ptr<Attempts> attempts(new Attempts(tools));
  DROVER_ASSIGN(attempts->watcher_, process::Watcher::start());
  for (int i = 0; i < kThreads; ++i) attempts->threads_.emplace_back([raw = attempts.get()] { raw->work(); });
  return attempts;
}

Attempts::~Attempts() {
  pause_.end();
  {
    const std::lock_guard lock(mutex_);
    ended_ = true;
  }
  changed_.notify_all();
  for (std::thread& thread : threads_) thread.join();
  watcher_.reset();  // its callbacks only enqueue, and nobody works the queue any more
}

void Attempts::enqueue(std::function<void()> task) {
  const std::lock_guard lock(mutex_);
  tasks_.push_back(std::move(task));
  changed_.notify_one();
}

void Attempts::work() {
  for (;;) {
    std::function<void()> task;
    {
      std::unique_lock lock(mutex_);
      changed_.wait(lock, [this] { return ended_ || !tasks_.empty(); });
      if (ended_) return;  // what still waits is on the disk, for the next start
      task = std::move(tasks_.front());
      tasks_.pop_front();
    }
    task();
  }
}

std::string Attempts::work_folder(const Key& key) const {
  return absl::StrCat(tools_.options.scratch, "/", key.run, ".", key.fence);
}

std::string Attempts::file(const Key& key, const char* name) const {
  return absl::StrCat(tools_.spool.attempt_folder(key), "/", name);
}

absl::Status Attempts::take(const v1::Grant& grant) {
  const Key key{grant.run(), grant.fence()};
  if (tools_.spool.knows(key) || !tools_.roster.accept(grant, tools_.clock.steady())) {
    spdlog::info("a grant came again run={} attempt={} study={}", key.run, key.fence, grant.study());
    return absl::OkStatus();
  }
  if (const absl::Status written = tools_.spool.write_order(grant); !written.ok()) {
    tools_.roster.forget(key);
    return written;
  }
  spdlog::info("granted run={} attempt={} study={} number={}", key.run, key.fence, grant.study(), grant.number());
  enqueue([this, key] { begin(key); });
  return absl::OkStatus();
}

absl::StatusOr<const code::Definition*> Attempts::definition_of(const v1::Grant& grant) const {
  const code::Definition* const definition = tools_.catalogue.find(grant.code());
  if (definition == nullptr) {
    return absl::NotFoundError(absl::StrCat("this worker has no code \"", grant.code(), "\""));
  }
  if (definition->digest != grant.code_digest()) {
    return absl::FailedPreconditionError(absl::StrCat(
        "the definition of code \"", grant.code(), "\" on this worker has digest ", definition->digest,
        ", and the run asks for ", grant.code_digest(), "; start the worker again after a definition was changed"));
  }
  return definition;
}

absl::Duration Attempts::time_limit(const v1::Grant& grant, const code::Definition& definition) {
  return grant.has_time_limit() ? link::from_proto(grant.time_limit()) : definition.time_limit;
}

void Attempts::begin(const Key& key) {
  const std::optional<Attempt> attempt = tools_.roster.find(key);
  if (!attempt) return;
  const v1::Grant& grant = attempt->grant;
  if (attempt->stop_asked) {
    finish(key, grant, not_begun(absl::StrCat("stopped before it began: ", attempt->stop_reason)));
    return;
  }
  if (closing_) {
    finish(key, grant, not_begun("its worker ends"));
    return;
  }
  const absl::StatusOr<const code::Definition*> definition = definition_of(grant);
  const absl::Status status = definition.ok() ? launch(key, grant, **definition) : definition.status();
  if (!status.ok()) finish(key, grant, lost(v1::LOSS_REASON_SITE, std::string(status.message())));
}

absl::Status Attempts::launch(const Key& key, const v1::Grant& grant, const code::Definition& definition) {
  const std::string work = work_folder(key);
  DROVER_TRY(tools_.files.remove_tree(work));  // of an earlier daemon that ended between this and its launch
  DROVER_TRY(tools_.files.make_folder(work));
  const std::vector<v1::NamedValue> inputs(grant.inputs().begin(), grant.inputs().end());
  DROVER_ASSIGN(const code::Staged staged, code::stage(definition, inputs, work));
  process::Launch what;
  what.runner = tools_.options.runner;
  what.folder = tools_.spool.attempt_folder(key);
  what.work = work;
  what.run = key.run;
  what.fence = key.fence;
  what.command = staged.command;
  what.environment = staged.environment;
  what.time_limit = time_limit(grant, definition);
  what.grace = definition.grace;
  DROVER_ASSIGN(const pid_t runner, process::launch(what));
  tools_.roster.begun(key, tools_.clock.steady());
  spdlog::info("running run={} attempt={} study={} code={} runner={}", key.run, key.fence, grant.study(), grant.code(),
               runner);
  const auto gone = [this, key] { enqueue([this, key] { ended(key); }); };
  if (!watcher_->add(runner, gone).ok()) gone();
  // A stop that came while it was being launched found nothing to stop.
  if (const std::optional<Attempt> now = tools_.roster.find(key); now && (now->stop_asked || closing_)) {
    order_stop(key, now->stop_asked ? kAsked : kWorkerEnds);
  }
  return absl::OkStatus();
}

void Attempts::order_stop(const Key& key, const std::string& why) {
  const absl::Status status = tools_.files.write_durably(file(key, process::kStopFile), why);
  if (status.ok()) return;
  spdlog::error("the order to stop cannot be written: {} run={} attempt={}", std::string(status.message()), key.run,
                key.fence);
}

void Attempts::stop(const Key& key, const std::string& reason) {
  if (!tools_.roster.ask_stop(key, reason)) return;
  spdlog::info("asked to stop: {} run={} attempt={}", reason, key.run, key.fence);
  const std::optional<Attempt> attempt = tools_.roster.find(key);
  if (attempt && attempt->phase == Phase::kRunning) order_stop(key, reason.empty() ? kAsked : reason);
}

void Attempts::close() { closing_ = true; }

void Attempts::stop_all() {
  for (const auto& [key, attempt] : tools_.roster.all()) {
    if (attempt.phase == Phase::kRunning && !attempt.stop_asked) order_stop(key, kWorkerEnds);
  }
}

}  // namespace drover::session
