#include "server/ledger/bench.h"

#include <sqlite3.h>

#include <chrono>
#include <cstdlib>
#include <filesystem>
#include <future>
#include <thread>
#include <utility>

#include "absl/strings/str_cat.h"
#include "store/connection.h"
#include "store/folder.h"

namespace drover::ledger {

Bench::Bench(BenchOptions options) : options_(std::move(options)) {
  folder_ = (std::filesystem::temp_directory_path() / "drover-ledger-XXXXXX").string();
  if (mkdtemp(folder_.data()) == nullptr) std::abort();
  open();
}

Bench::~Bench() {
  close();
  std::error_code ignored;
  std::filesystem::remove_all(folder_, ignored);
}

void Bench::open() {
  store::StoreOptions store_options;
  store_options.fresh_id = "store-1";
  store_options.most_pages = options_.most_pages;
  absl::StatusOr<std::unique_ptr<store::Store>> store = store::Store::open(folder_, store_options);
  if (!store.ok()) std::abort();
  Options options;
  options.licences = options_.licences;
  options.version = "test";
  options.clock = [this] {
    const absl::Duration now = absl::Milliseconds(ms_.load());
    return Now{absl::Hours(1) + now, absl::FromUnixSeconds(1'800'000'000) + now};
  };
  options.fresh_token = [this] { return absl::StrCat("token-", ms_.load()); };
  options.fresh_seed = [] { return std::uint64_t{7}; };
  options.fingerprint = "machine";
  options.die = [](const absl::Status&) { std::abort(); };
  options.plant_early_answers_for_test = options_.early_answers;
  options.committed = [this](const std::set<std::int64_t>& studies) {
    if (Learners* const learners = told_.load()) {
      for (const std::int64_t study : studies) learners->poke(study);
    }
  };
  absl::StatusOr<std::unique_ptr<Ledger>> ledger = Ledger::start(*std::move(store), std::move(options));
  if (!ledger.ok()) std::abort();
  ledger_ = *std::move(ledger);
  learners_ = std::make_unique<Learners>(folder_, *ledger_);
  told_ = learners_.get();
}

void Bench::close() {
  learners_->stop();
  ledger_->drain();
  told_ = nullptr;
  learners_.reset();
  ledger_.reset();
}

void Bench::restart() {
  close();
  open();
}

void Bench::restart_with_space() {
  options_.most_pages = 0;
  restart();
}

void Bench::advance(absl::Duration by) {
  // In steps that the ledger does not take for an absence of its own.
  for (absl::Duration left = by; left > absl::ZeroDuration(); left -= absl::Seconds(1)) {
    ms_ += absl::ToInt64Milliseconds(std::min(left, absl::Seconds(1)));
    static_cast<void>(call("", "", [](Turn&) -> absl::StatusOr<std::string> { return std::string(); }));
  }
}

absl::StatusOr<std::string> Bench::call(const std::string& id, const std::string& digest,
                                        std::function<absl::StatusOr<std::string>(Turn&)> decide) {
  auto answered = std::make_shared<std::promise<absl::StatusOr<std::string>>>();
  auto future = answered->get_future();
  Call one;
  one.request_id = id;
  one.principal = "test";
  one.digest = digest;
  one.decide = std::move(decide);
  one.answer = [this, id, answered](absl::StatusOr<std::string> answer) {
    if (options_.at_answer && answer.ok() && !id.empty()) options_.at_answer(folder_, id);
    answered->set_value(std::move(answer));
  };
  ledger_->submit(std::move(one));
  return future.get();
}

namespace {

template <class Response>
absl::StatusOr<Response> parsed(absl::StatusOr<std::string> bytes) {
  if (!bytes.ok()) return bytes.status();
  Response response;
  response.ParseFromString(*bytes);
  return response;
}

template <class Response, class Handler>
std::function<absl::StatusOr<std::string>(Turn&)> deciding(Handler handler) {
  return [handler](Turn& turn) -> absl::StatusOr<std::string> {
    const absl::StatusOr<Response> response = handler(turn);
    if (!response.ok()) return response.status();
    return serialise(*response);
  };
}

}  // namespace

absl::StatusOr<v1::EnrolResponse> Bench::enrol(const std::string& worker, int slots, std::vector<v1::RollEntry> roll,
                                               std::int64_t incarnation) {
  v1::EnrolRequest request;
  request.set_worker(worker);
  request.set_host("here");
  request.set_slots(slots);
  request.set_incarnation(incarnation);
  request.set_roll_call_complete(true);
  *request.add_codes() = test_code();
  for (v1::RollEntry& entry : roll) *request.add_roll_call() = std::move(entry);
  const std::string token = absl::StrCat(worker, "-", incarnation, "-", ++ids_);
  return parsed<v1::EnrolResponse>(
      call(absl::StrCat("enrol-", ids_), "",
           deciding<v1::EnrolResponse>([request, token](Turn& turn) { return ledger::enrol(turn, request, token); })));
}

std::string Bench::session(const std::string& worker, int slots) {
  const absl::StatusOr<v1::EnrolResponse> response = enrol(worker, slots);
  return response.ok() ? response->session() : std::string();
}

absl::StatusOr<v1::LeaseResponse> Bench::lease(const std::string& session, int want, absl::Duration) {
  v1::LeaseRequest request;
  request.set_session(session);
  request.set_want(want);
  return parsed<v1::LeaseResponse>(
      call(absl::StrCat("lease-", ++ids_), "",
           deciding<v1::LeaseResponse>([request](Turn& turn) { return ledger::lease(turn, request); })));
}

std::vector<v1::Grant> Bench::grants(const std::string& session, int count) {
  std::vector<v1::Grant> granted;
  eventually([&] {
    const absl::StatusOr<v1::LeaseResponse> response = lease(session, count - static_cast<int>(granted.size()));
    if (response.ok()) granted.insert(granted.end(), response->grants().begin(), response->grants().end());
    return static_cast<int>(granted.size()) == count;
  });
  return granted;
}

absl::StatusOr<v1::ReportResponse> Bench::report(const std::string& session, const v1::AttemptReport& report) {
  v1::ReportRequest request;
  request.set_session(session);
  *request.add_reports() = report;
  return parsed<v1::ReportResponse>(
      call(absl::StrCat("report-", ++ids_), "",
           deciding<v1::ReportResponse>([request](Turn& turn) { return ledger::report(turn, request); })));
}

absl::StatusOr<v1::RenewResponse> Bench::renew(const std::string& session, const v1::Grant& grant,
                                               v1::RollState state) {
  v1::RenewRequest request;
  request.set_session(session);
  v1::AttemptStatus& status = *request.add_attempts();
  status.set_run(grant.run());
  status.set_fence(grant.fence());
  status.set_state(state);
  return parsed<v1::RenewResponse>(
      call("", "", deciding<v1::RenewResponse>([request](Turn& turn) { return ledger::renew(turn, request); })));
}

absl::StatusOr<v1::Study> Bench::start(const v1::StudySpec& spec) {
  v1::StartStudyRequest request;
  *request.mutable_spec() = spec;
  return parsed<v1::Study>(call(absl::StrCat("start-", ++ids_), "", deciding<v1::Study>([request](Turn& turn) {
                                  return start_study(turn, request, {.fresh_seed = 7, .fingerprint = "machine"});
                                })));
}

absl::StatusOr<v1::Study> Bench::change(const std::string& name,
                                        absl::StatusOr<v1::Study> (*handler)(Turn&, const std::string&)) {
  return parsed<v1::Study>(call(absl::StrCat("change-", ++ids_), "",
                                deciding<v1::Study>([name, handler](Turn& turn) { return handler(turn, name); })));
}

std::int64_t Bench::count(const std::string& sql) {
  auto connection =
      store::Connection::open(absl::StrCat(folder_, "/", store::kDatabaseFile), store::Connection::Kind::kReader, "");
  return connection.ok() ? (*connection)->number(sql).value_or(-1) : -1;
}

std::string Bench::text(const std::string& sql) {
  auto connection =
      store::Connection::open(absl::StrCat(folder_, "/", store::kDatabaseFile), store::Connection::Kind::kReader, "");
  if (!connection.ok()) return {};
  store::Statement row(**connection, sql);
  return row.next() ? row.text(0) : std::string();
}

v1::CodeDefinition test_code() {
  v1::CodeDefinition code;
  code.set_name("hill");
  code.set_version("1");
  code.set_digest("c0de");
  code.add_accepts()->set_name("x");
  code.add_outputs()->set_name("height");
  code.set_cores(1);
  (*code.mutable_licences())["token"] = 1;
  code.mutable_time_limit()->set_seconds(60);
  code.mutable_grace()->set_seconds(1);
  return code;
}

v1::StudySpec test_study(std::int64_t runs) {
  v1::StudySpec spec;
  spec.set_name("s");
  spec.add_codes()->set_code("hill");
  v1::Variable& x = *spec.add_variables();
  x.set_name("x");
  x.set_kind(v1::VARIABLE_KIND_REAL);
  x.set_low(0);
  x.set_high(1);
  spec.add_objectives()->set_name("height");
  spec.mutable_search()->set_method("space-filling");
  spec.mutable_budget()->set_runs(runs);
  return spec;
}

namespace {

v1::AttemptReport report_of(const v1::Grant& grant, v1::Ending ending) {
  v1::AttemptReport report;
  report.set_run(grant.run());
  report.set_fence(grant.fence());
  report.set_input_digest(grant.input_digest());
  report.set_ending(ending);
  return report;
}

}  // namespace

v1::AttemptReport evaluated(const v1::Grant& grant, double height) {
  v1::AttemptReport report = report_of(grant, v1::ENDING_EVALUATED);
  report.add_outputs()->set_name("height");
  report.mutable_outputs(0)->set_value(height);
  return report;
}

v1::AttemptReport failed(const v1::Grant& grant) {
  v1::AttemptReport report = report_of(grant, v1::ENDING_FAILED);
  report.set_failure(v1::FAILURE_KIND_CODE);
  report.set_reason("FATAL");
  return report;
}

v1::AttemptReport lost(const v1::Grant& grant, v1::LossReason why) {
  v1::AttemptReport report = report_of(grant, v1::ENDING_LOST);
  report.set_loss(why);
  return report;
}

bool eventually(const std::function<bool()>& holds) {
  for (int tries = 0; tries < 3000; ++tries) {
    if (holds()) return true;
    std::this_thread::sleep_for(std::chrono::milliseconds(10));
  }
  return false;
}

}  // namespace drover::ledger
