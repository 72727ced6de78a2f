#include "link/channel.h"

#include <arpa/inet.h>
#include <grpc/support/time.h>

#include <string>

#include "absl/strings/str_cat.h"

namespace drover::link {
namespace {

constexpr int kLargestAnswerMetadata = 64 << 10;  // bytes; the details of an error travel there

int milliseconds(absl::Duration span) { return static_cast<int>(absl::ToInt64Milliseconds(span)); }

// With the scheme spelled out, or gRPC would take a host called "dns" for one.
std::string target_of(const Address& address) {
  if (address.is_unix) return address.text();
  in_addr four{};
  if (address.host.find(':') != std::string::npos) return absl::StrCat("ipv6:", address.text());
  if (inet_pton(AF_INET, address.host.c_str(), &four) == 1) return absl::StrCat("ipv4:", address.text());
  return absl::StrCat("dns:///", address.text());
}

}  // namespace

absl::StatusOr<std::shared_ptr<grpc::Channel>> dial(const Address& address) {
  if (!address.is_local()) {
    return absl::UnimplementedError(absl::StrCat("coordinator ", address.text(),
                                                 " is on another machine, and connections between machines need "
                                                 "certificates, which are not there yet"));
  }
  if (!address.is_unix && address.port == 0) {
    return absl::InvalidArgumentError(absl::StrCat("coordinator ", address.text(), ": port 0 is for listening only"));
  }
  grpc::ChannelArguments arguments;
  arguments.SetInt(GRPC_ARG_ENABLE_HTTP_PROXY, 0);  // else a proxy of the environment is asked, even for localhost
  arguments.SetInt(GRPC_ARG_KEEPALIVE_TIME_MS, milliseconds(kPingEvery));
  arguments.SetInt(GRPC_ARG_KEEPALIVE_TIMEOUT_MS, milliseconds(kPingAnswer));
  arguments.SetInt(GRPC_ARG_KEEPALIVE_PERMIT_WITHOUT_CALLS, 0);
  arguments.SetInt(GRPC_ARG_HTTP2_MAX_PINGS_WITHOUT_DATA, 0);  // a long poll sends no data, and is pinged all the same
  arguments.SetInt(GRPC_ARG_INITIAL_RECONNECT_BACKOFF_MS, 100);
  // How long one attempt to connect may take. Between calls the library looks at its sockets only every five seconds,
  // and would give up attempts that had come through.
  arguments.SetInt(GRPC_ARG_MIN_RECONNECT_BACKOFF_MS, 10'000);
  arguments.SetInt(GRPC_ARG_MAX_RECONNECT_BACKOFF_MS, 20'000);
  arguments.SetInt(GRPC_ARG_ENABLE_RETRIES, 0);             // ours know the request ids
  arguments.SetInt(GRPC_ARG_USE_LOCAL_SUBCHANNEL_POOL, 1);  // a new channel does not inherit another's back-off
  arguments.SetInt(GRPC_ARG_MAX_METADATA_SIZE, kLargestAnswerMetadata);
  arguments.SetMaxReceiveMessageSize(kLargestMessage);
  arguments.SetMaxSendMessageSize(kLargestMessage);
  return grpc::CreateCustomChannel(target_of(address), grpc::InsecureChannelCredentials(), arguments);
}

void set_server_options(grpc::ServerBuilder& builder) {
  builder.SetMaxReceiveMessageSize(kLargestMessage);
  builder.SetMaxSendMessageSize(kLargestMessage);
  builder.AddChannelArgument(GRPC_ARG_ALLOW_REUSEPORT, 0);  // a second server on the port must fail, not share it
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_TIME_MS, milliseconds(kPingEvery));
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_TIMEOUT_MS, milliseconds(kPingAnswer));
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_PERMIT_WITHOUT_CALLS, 1);
  builder.AddChannelArgument(GRPC_ARG_HTTP2_MAX_PINGS_WITHOUT_DATA, 0);
  builder.AddChannelArgument(GRPC_ARG_HTTP2_MIN_RECV_PING_INTERVAL_WITHOUT_DATA_MS, milliseconds(kPingEvery) / 2);
}

void set_deadline(grpc::ClientContext& context, absl::Duration limit) {
  const gpr_timespec span = gpr_time_from_nanos(absl::ToInt64Nanoseconds(limit), GPR_TIMESPAN);
  context.set_deadline(gpr_time_add(gpr_now(GPR_CLOCK_MONOTONIC), span));
}

}  // namespace drover::link
