// The coordinator as a whole, but for the process around it: store, ledger, learners, gRPC.
#pragma once

#include <cstdint>
#include <functional>
#include <map>
#include <memory>
#include <string>

#include <grpcpp/grpcpp.h>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "dispatch/times.h"
#include "ledger/learner.h"
#include "ledger/ledger.h"
#include "ledger/readers.h"
#include "link/address.h"
#include "link/clock.h"
#include "service/studies_service.h"
#include "service/work_service.h"
#include "store/store.h"

namespace drover::service {

struct ServerOptions {
  std::string data;       // folder
  link::Address listen;   // TCP: this machine's only
  dispatch::Times times;
  std::map<std::string, std::int32_t> licences;
  std::string version;
  store::StoreOptions store;  // id and time are filled in
  const link::Clock* clock = nullptr;                // must outlive the server
  std::function<std::string()> fresh_id;             // unguessable
  std::function<std::uint64_t()> fresh_seed;
  std::function<void(const absl::Status&)> die;      // must not return: the state on disk is all that counts
  int reading_threads = 2;
  bool plant_early_answers_for_test = false;
};

class Server {
 public:
  // Opens the store, recovers, listens. ABORTED, FAILED_PRECONDITION, DATA_LOSS: as Store::open; UNAVAILABLE: the
  // address cannot be listened on.
  static absl::StatusOr<std::unique_ptr<Server>> start(ServerOptions options);
  ~Server();
  Server(const Server&) = delete;
  Server& operator=(const Server&) = delete;

  // Where it listens; of TCP with the port that was found.
  link::Address address() const { return address_; }
  ledger::Ledger& ledger() { return *ledger_; }
  const std::string& store_id() const { return store_id_; }

  // Says that it serves no more, answers what waits, lets calls in flight end (for at most a second), writes all
  // back. Idempotent.
  void drain();

 private:
  Server() = default;
  absl::Status start_ledger(ServerOptions& options);
  absl::Status listen(const ServerOptions& options);
  void say_serving(bool serving);

  std::string store_id_;
  link::Address address_;
  std::unique_ptr<ledger::Ledger> ledger_;
  std::unique_ptr<ledger::Readers> readers_;
  std::unique_ptr<WorkService> work_;
  std::unique_ptr<StudiesService> studies_;
  std::unique_ptr<ledger::Learners> learners_;
  std::unique_ptr<grpc::Server> server_;
  // What the ledger calls after commits; set once everything is there.
  std::atomic<bool> ready_ = false;
  std::atomic<bool> writable_ = true;
  bool drained_ = false;
};

}  // namespace drover::service
