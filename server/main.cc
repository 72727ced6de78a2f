// drover-coordinator: keeps studies and hands their runs to workers.
#include <spdlog/spdlog.h>
#include <unistd.h>

#include <CLI/CLI.hpp>
#include <cstdlib>
#include <future>
#include <iostream>
#include <memory>
#include <string>

#include "configuration.h"
#include "link/address.h"
#include "link/clock.h"
#include "link/identity.h"
#include "link/log.h"
#include "link/stopping.h"
#include "service/server.h"

namespace drover {
namespace {

constexpr int kDone = 0, kFailed = 1, kUsage = 2;

struct Options {
  std::string data, listen = link::default_address(), config;
  bool trust_host = false, accept_lost_history = false, allow_network_file_system = false;
  int owner = 0;
};

// Nothing in memory can be trusted: what is on disk is read anew by the next start.
[[noreturn]] void die(const absl::Status& status) {
  spdlog::critical("the store failed, and this process ends so that the next one recovers from the disk: {}",
                   std::string(status.message()));
  spdlog::default_logger()->flush();
  std::_Exit(kFailed);
}

int refuse(const absl::Status& status) {
  std::cerr << "drover-coordinator: " << status.message() << "\n";
  const bool input = absl::IsInvalidArgument(status) || absl::IsNotFound(status) || absl::IsFailedPrecondition(status);
  return input ? kUsage : kFailed;
}

absl::StatusOr<link::Address> listening_address(const Options& options) {
  absl::StatusOr<link::Address> address = link::Address::parse(options.listen);
  if (!address.ok() || address->is_unix) return address;
  if (!address->is_local()) {
    return absl::InvalidArgumentError("--listen " + options.listen +
                                      ": other machines could reach it, and certificates are not there yet; use a "
                                      "unix: socket, or 127.0.0.1 with --trust-everyone-on-this-host");
  }
  if (!options.trust_host) {
    return absl::InvalidArgumentError("--listen " + options.listen +
                                      ": everybody on this host could use it; if that is meant, add "
                                      "--trust-everyone-on-this-host, else use a unix: socket");
  }
  return address;
}

absl::StatusOr<service::ServerOptions> server_options(const Options& options, const link::Clock& clock) {
  absl::StatusOr<link::Address> address = listening_address(options);
  if (!address.ok()) return address.status();
  service::ServerOptions made;
  if (!options.config.empty()) {
    absl::StatusOr<Configuration> configuration = read_configuration(options.config);
    if (!configuration.ok()) return configuration.status();
    made.times = configuration->times;
    made.licences = configuration->licences;
  }
  made.data = options.data;
  made.listen = *std::move(address);
  made.version = DROVER_VERSION;
  made.store.accept_lost_history = options.accept_lost_history;
  made.store.checks.allow_network_file_system = options.allow_network_file_system;
  made.clock = &clock;
  made.fresh_id = link::random_id;
  made.fresh_seed = link::random_number;
  made.die = die;
  return made;
}

int serve(const Options& options) {
  const link::RealClock clock;
  absl::StatusOr<service::ServerOptions> made = server_options(options, clock);
  if (!made.ok()) return refuse(made.status());
  absl::StatusOr<std::unique_ptr<service::Server>> server = service::Server::start(*std::move(made));
  if (!server.ok()) return refuse(server.status());
  std::promise<void> stop;
  absl::StatusOr<std::unique_ptr<link::StopWatch>> watch =
      link::StopWatch::start(options.owner, [&stop](link::StopCause cause, int count) {
        if (count > 1) std::_Exit(kFailed);  // the disk has all that was acknowledged
        spdlog::info("stopping: {}", cause == link::StopCause::kSignal ? "a signal came" : "its owner has ended");
        stop.set_value();
      });
  if (!watch.ok()) return refuse(watch.status());
  if (options.trust_host) spdlog::warn("everybody on this host is trusted (--trust-everyone-on-this-host)");
  if (options.allow_network_file_system)
    spdlog::warn("a network file system is allowed; locks and syncs may fail there");
  spdlog::info("serving address={} data={} store={} term={}", (*server)->address().text(), options.data,
               (*server)->store_id(), (*server)->ledger().coordinator().term());
  stop.get_future().wait();
  (*server)->drain();
  spdlog::info("stopped");
  return kDone;
}

int run(int argc, char** argv) {
  CLI::App app(
      "Keeps Drover's studies and hands their runs to workers.\n\n"
      "  drover-coordinator serve --data /var/lib/drover\n");
  app.set_version_flag("--version", DROVER_VERSION);
  app.require_subcommand(1);
  Options options;
  CLI::App* const command = app.add_subcommand("serve", "Serve until SIGTERM");
  command->add_option("--data", options.data, "Folder of the store, on a local disk; made where there is none")
      ->required();
  command->add_option("--listen", options.listen, "unix:/path, or 127.0.0.1:port (0: any free one)")
      ->capture_default_str();
  command->add_option("--config", options.config, "TOML file with [licences] and [times]");
  command->add_flag("--trust-everyone-on-this-host", options.trust_host, "Needed to listen on a TCP port");
  command->add_flag("--allow-network-file-system", options.allow_network_file_system,
                    "Take the risk of a data folder on one");
  command->add_flag("--accept-lost-history", options.accept_lost_history,
                    "Open a store that has lost its newest events");
  command->add_option("--end-with-pid", options.owner, "End when this process does")->check(CLI::PositiveNumber);
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    const int code = app.exit(error);
    return code == 0 ? kDone : kUsage;
  }
  return serve(options);
}

}  // namespace
}  // namespace drover

int main(int argc, char** argv) {
  drover::link::block_signals();
  drover::link::start_log("drover-coordinator");
  return drover::run(argc, argv);
}
