#include "service/server.h"

#include <grpcpp/health_check_service_interface.h>
#include <sys/stat.h>
#include <unistd.h>

#include <chrono>
#include <utility>

#include "absl/strings/str_cat.h"
#include "link/channel.h"
#include "spdlog/spdlog.h"
#include "status/try.h"
#include "study/machine.h"

namespace drover::service {
namespace {

// All that waits in the ledger has been answered by then; only reads may be under way. Idle clients do not hear that we
// go before they look, and are not waited for.
constexpr std::chrono::seconds kLastCalls{1};

}  // namespace

absl::StatusOr<std::unique_ptr<Server>> Server::start(ServerOptions options) {
  std::unique_ptr<Server> server(new Server);
  DROVER_TRY(server->start_ledger(options));
  DROVER_TRY(server->listen(options));
  server->say_serving(true);
  return server;
}

absl::Status Server::start_ledger(ServerOptions& options) {
  options.store.fresh_id = options.fresh_id();
  options.store.create_us = absl::ToUnixMicros(options.clock->wall());
  DROVER_ASSIGN(std::unique_ptr<store::Store> store, store::Store::open(options.data, options.store));
  store_id_ = store->store_id();
  const std::string folder = store->folder();
  ledger::Options settings;
  settings.times = options.times;
  settings.licences = options.licences;
  settings.version = options.version;
  settings.clock = [clock = options.clock] { return ledger::Now{clock->steady(), clock->wall()}; };
  settings.die = options.die;
  settings.plant_early_answers_for_test = options.plant_early_answers_for_test;
  settings.committed = [this](const std::set<std::int64_t>& studies) {
    if (!ready_) return;
    studies_->changed(studies);
    for (const std::int64_t study : studies) learners_->poke(study);
  };
  settings.writable = [this](bool writable) {
    if (!ready_ || writable_.exchange(writable) == writable) return;
    if (writable) {
      spdlog::info("the disk takes writes again");
    } else {
      spdlog::error("the disk is full: nothing is acknowledged or granted until there is space");
    }
    say_serving(writable);
  };
  DROVER_ASSIGN(ledger_, ledger::Ledger::start(std::move(store), std::move(settings)));
  DROVER_ASSIGN(readers_, ledger::Readers::open(folder, options.reading_threads));
  work_ = std::make_unique<WorkService>(*ledger_, options.fresh_id);
  studies_ = std::make_unique<StudiesService>(*ledger_, *readers_,
                                              StudiesService::Fresh{options.fresh_seed, study::machine_fingerprint()});
  learners_ = std::make_unique<ledger::Learners>(folder, *ledger_);
  return absl::OkStatus();
}

absl::Status Server::listen(const ServerOptions& options) {
  address_ = options.listen;
  if (!address_.is_local()) {
    return absl::InvalidArgumentError(absl::StrCat("cannot listen on ", address_.text(),
                                                   ": other machines could reach it, and there are no certificates"));
  }
  if (address_.is_unix) {
    DROVER_TRY(link::prepare_socket_folder(address_));
    unlink(address_.path.c_str());  // of one that was killed: the data folder's lock says that none is alive
  }
  grpc::EnableDefaultHealthCheckService(true);
  grpc::ServerBuilder builder;
  link::set_server_options(builder);
  int port = 0;
  builder.AddListeningPort(address_.text(), grpc::InsecureServerCredentials(), &port);
  builder.RegisterService(work_.get());
  builder.RegisterService(studies_.get());
  const mode_t before = umask(0077);
  server_ = builder.BuildAndStart();
  umask(before);
  if (server_ == nullptr) return absl::UnavailableError(absl::StrCat("cannot listen on ", address_.text()));
  if (!address_.is_unix) address_.port = port;
  ready_ = true;
  for (const std::int64_t study : ledger_->open_studies()) learners_->poke(study);
  return absl::OkStatus();
}

void Server::say_serving(bool serving) {
  if (server_ == nullptr) return;
  grpc::HealthCheckServiceInterface& health = *server_->GetHealthCheckService();
  health.SetServingStatus(serving);  // the whole
  for (const char* const name : {v1::Work::service_full_name(), v1::Studies::service_full_name()}) {
    health.SetServingStatus(name, serving);
  }
}

Server::~Server() { drain(); }

void Server::drain() {
  if (std::exchange(drained_, true)) return;
  say_serving(false);
  if (learners_) learners_->stop();
  ready_ = false;
  if (studies_) studies_->end_polls();
  if (ledger_) ledger_->drain();
  if (server_) server_->Shutdown(std::chrono::system_clock::now() + kLastCalls);
  readers_.reset();
  if (address_.is_unix && server_) unlink(address_.path.c_str());
  server_.reset();
  learners_.reset();
  studies_.reset();
  work_.reset();
  ledger_.reset();
}

}  // namespace drover::service
