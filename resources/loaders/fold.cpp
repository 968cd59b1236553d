// Folds a spectrum with every replica of an Entasis bundle and prints mean and sd of each outcome.
//
//     g++ -std=c++17 -O2 fold.cpp -o fold && ./fold BUNDLE [SPECTRUM]
//
// BUNDLE is the folder that `entasis build` wrote. SPECTRUM is a text file with one number a line: the expected events
// of each column (for a numeric axis: below, the bins, above). Without it, 1000 each. No library is needed; outcomes are
// printed by their number, counted from 1 in the order of manifest.json. The sd is the uncertainty that the calibration's
// statistics leave in the folded spectrum: systematic effects are yours to add. For little-endian machines.

#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstring>
#include <exception>
#include <fstream>
#include <sstream>
#include <stdexcept>
#include <string>
#include <vector>

// An NPY 1.0 file of doubles in C order, open at its first number.
struct Npy {
  std::ifstream file;
  std::vector<std::size_t> shape;

  explicit Npy(const std::string& path) : file(path, std::ios::binary) {
    unsigned char start[10];
    if (!file.read(reinterpret_cast<char*>(start), sizeof start) || std::memcmp(start, "\x93NUMPY\x01\x00", 8) != 0)
      throw std::runtime_error(path + ": not an NPY 1.0 file");
    std::string header(start[8] + 256u * start[9], ' ');
    file.read(header.data(), static_cast<std::streamsize>(header.size()));
    if (header.find("'descr': '<f8', 'fortran_order': False") == std::string::npos)
      throw std::runtime_error(path + ": not doubles in C order");
    const std::size_t open = header.find('(') + 1;
    std::string numbers = header.substr(open, header.find(')') - open);
    for (char& c : numbers)
      if (c == ',') c = ' ';
    std::istringstream words(numbers);
    for (std::size_t n; words >> n;) shape.push_back(n);
  }

  void read(std::vector<double>& values) {
    const auto bytes = static_cast<std::streamsize>(values.size() * sizeof(double));
    if (!file.read(reinterpret_cast<char*>(values.data()), bytes)) throw std::runtime_error("replicas.npy ends too early");
  }
};

static std::vector<double> numbersOf(const char* path) {
  std::ifstream file(path);
  std::vector<double> numbers;
  for (double x; file >> x;) numbers.push_back(x);
  return numbers;
}

static void fold(int count, char** arguments) {
  if (count < 2) throw std::runtime_error("usage: fold BUNDLE [SPECTRUM]");
  Npy npy(std::string(arguments[1]) + "/replicas.npy");
  if (npy.shape.size() != 3) throw std::runtime_error("replicas.npy is not [replica, column, outcome]");
  const std::size_t replicas = npy.shape[0], columns = npy.shape[1], outcomes = npy.shape[2];
  const std::vector<double> expected = count > 2 ? numbersOf(arguments[2]) : std::vector<double>(columns, 1000.0);
  if (expected.size() != columns) throw std::runtime_error("the spectrum needs " + std::to_string(columns) + " numbers");

  // Mean and sum of squared deviations, updated replica by replica (Welford 1962): one replica is in memory at a time.
  std::vector<double> p(columns * outcomes), mean(outcomes, 0.0), squares(outcomes, 0.0);
  for (std::size_t r = 0; r < replicas; ++r) {
    npy.read(p);
    for (std::size_t k = 0; k < outcomes; ++k) {
      double folded = 0.0;
      for (std::size_t j = 0; j < columns; ++j) folded += expected[j] * p[j * outcomes + k];
      const double away = folded - mean[k];
      mean[k] += away / static_cast<double>(r + 1);
      squares[k] += away * (folded - mean[k]);
    }
  }
  for (std::size_t k = 0; k < outcomes; ++k)
    std::printf("%zu\t%.6g\t%.6g\n", k + 1, mean[k], std::sqrt(squares[k] / static_cast<double>(replicas - 1)));
}

int main(int count, char** arguments) {
  try {
    fold(count, arguments);
    return 0;
  } catch (const std::exception& error) {
    std::fprintf(stderr, "%s\n", error.what());
    return 1;
  }
}
