// The same library sets the wall clock ahead by AGREED_CLOCK_AHEAD seconds, so that days of an outage pass
// between two starts of the real executable. Waits go by the monotonic clock and stay as they are.
#include <cstdlib>
#include <ctime>

#include <dlfcn.h>
#include <sys/time.h>

namespace {

time_t ahead() {
  static const time_t kAhead = [] {
    const char* const seconds = std::getenv("AGREED_CLOCK_AHEAD");
    return seconds == nullptr ? time_t{0} : static_cast<time_t>(std::atoll(seconds));
  }();
  return kAhead;
}

}  // namespace

extern "C" {

int clock_gettime(clockid_t clock, timespec* now) noexcept {
  static const auto kReal =
      reinterpret_cast<int (*)(clockid_t, timespec*)>(::dlsym(RTLD_NEXT, "clock_gettime"));
  const int result = kReal(clock, now);
  if (result == 0 && clock == CLOCK_REALTIME) now->tv_sec += ahead();
  return result;
}

time_t time(time_t* to) noexcept {
  timespec now{};
  clock_gettime(CLOCK_REALTIME, &now);
  if (to != nullptr) *to = now.tv_sec;
  return now.tv_sec;
}

int gettimeofday(timeval* now, void* /*zone*/) noexcept {
  timespec exact{};
  clock_gettime(CLOCK_REALTIME, &exact);
  now->tv_sec = exact.tv_sec;
  now->tv_usec = exact.tv_nsec / 1000;
  return 0;
}

}  // extern "C"
