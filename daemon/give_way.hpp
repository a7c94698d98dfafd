#pragma once
// Threads that do much at a time give way to those that answer people.
#include <sys/resource.h>
#include <sys/syscall.h>
#include <unistd.h>

namespace agreed {

/// The calling thread gives way from now on: whoever waits for an HTTP answer does not notice a backlog. On
/// Linux a niceness is a thread's own. Where it is not allowed, nothing changes.
inline void give_way() {
  constexpr int kNiceness = 5;
  ::setpriority(PRIO_PROCESS, static_cast<id_t>(::syscall(SYS_gettid)), kNiceness);
}

}  // namespace agreed
