#include "link/channel.h"

#include <chrono>

#include "absl/strings/str_cat.h"

namespace drover::link {
namespace {

int ms(absl::Duration span) { return static_cast<int>(absl::ToInt64Milliseconds(span)); }

constexpr absl::Duration kReconnectFirst = absl::Milliseconds(100);
constexpr absl::Duration kReconnectMost = absl::Seconds(20);
constexpr int kStreamsPerConnection = 16;
constexpr int kMetadataBytes = 8 << 10;

}  // namespace

absl::StatusOr<std::shared_ptr<grpc::Channel>> dial(const Address& address) {
  if (!address.is_local()) {
    return absl::UnimplementedError(absl::StrCat(
        address.text(), " is on another machine, and certificates are not there yet; use a unix: socket or 127.0.0.1"));
  }
  grpc::ChannelArguments arguments;
  arguments.SetMaxReceiveMessageSize(kLargestMessage);
  arguments.SetMaxSendMessageSize(kLargestMessage);
  arguments.SetInt(GRPC_ARG_KEEPALIVE_TIME_MS, ms(kPingEvery));
  arguments.SetInt(GRPC_ARG_KEEPALIVE_TIMEOUT_MS, ms(kPingAnswer));
  arguments.SetInt(GRPC_ARG_KEEPALIVE_PERMIT_WITHOUT_CALLS, 0);
  arguments.SetInt(GRPC_ARG_HTTP2_MAX_PINGS_WITHOUT_DATA, 0);
  arguments.SetInt(GRPC_ARG_INITIAL_RECONNECT_BACKOFF_MS, ms(kReconnectFirst));
  arguments.SetInt(GRPC_ARG_MIN_RECONNECT_BACKOFF_MS, ms(kReconnectFirst));
  arguments.SetInt(GRPC_ARG_MAX_RECONNECT_BACKOFF_MS, ms(kReconnectMost));
  arguments.SetInt(GRPC_ARG_ENABLE_RETRIES, 0);
  // A connection of its own: two channels of one process to one address would share their fate and their windows.
  arguments.SetInt(GRPC_ARG_USE_LOCAL_SUBCHANNEL_POOL, 1);
  return grpc::CreateCustomChannel(address.text(), grpc::InsecureChannelCredentials(), arguments);
}

void set_server_options(grpc::ServerBuilder& builder) {
  builder.SetMaxReceiveMessageSize(kLargestMessage);
  builder.SetMaxSendMessageSize(kLargestMessage);
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_TIME_MS, ms(kPingEvery));
  builder.AddChannelArgument(GRPC_ARG_KEEPALIVE_TIMEOUT_MS, ms(kPingAnswer));
  builder.AddChannelArgument(GRPC_ARG_HTTP2_MIN_RECV_PING_INTERVAL_WITHOUT_DATA_MS, ms(kPingAnswer));
  builder.AddChannelArgument(GRPC_ARG_HTTP2_MAX_PINGS_WITHOUT_DATA, 0);
  builder.AddChannelArgument(GRPC_ARG_MAX_CONCURRENT_STREAMS, kStreamsPerConnection);
  builder.AddChannelArgument(GRPC_ARG_MAX_METADATA_SIZE, kMetadataBytes);
  // A second server on the same port must fail and not share it.
  builder.AddChannelArgument(GRPC_ARG_ALLOW_REUSEPORT, 0);
}

void set_deadline(grpc::ClientContext& context, absl::Duration limit) {
  context.set_deadline(std::chrono::system_clock::now() + absl::ToChronoMilliseconds(limit));
}

}  // namespace drover::link
