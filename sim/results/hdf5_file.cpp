#include "sim/results/hdf5_file.hpp"

#include <hdf5.h>
#include <hdf5_hl.h>

#include <algorithm>
#include <filesystem>
#include <functional>
#include <iterator>
#include <limits>
#include <map>
#include <mutex>
#include <numeric>
#include <sstream>
#include <stdexcept>
#include <utility>

#include "sim/results/utf8.hpp"

// What makes the file open everywhere (h5py, xarray, netCDF4, ncdump):
//   all items in the root group; creation order tracked and indexed, or netCDF sees them unordered;
//   a dimension scale attached to every dimension of every dataset, or netCDF refuses the file;
//   string datasets of variable length, or ncdump crashes; string attributes of fixed length;
//   states as 8-bit integers with flag_values and flag_meanings: netCDF leaves out an enumeration without a word;
//   _FillValue equal to the fill value of storage, on numbers that may be missing. Flags are never missing, and
//   without it xarray keeps them integers.
// A long text fits in both places: HDF5 moves an attribute past 64 kB into dense storage by itself, because tracked
// order gives the root group the newer header; all four readers open it. As a single text (TextTable without axis) it
// does not fill the screen of ncdump -h, so the input file goes there.
// What makes it whole: HDF5 builds the file in memory and one plain write carries it out, so that a full disk is an
// error number and never a library holding a broken file.
namespace leat {
namespace {

constexpr hsize_t chunk_rows = 256;
constexpr std::size_t largest_chunk = 1 << 20;       // [byte]
constexpr std::size_t smallest_deflated = 4 * 1024;  // [byte]
constexpr const char* conventions = "CF-1.8";

// A call that HDF5 refused, or a file that is not ours; caught at the two entries below.
class Hdf5Fault : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

template <class Number>
Number need(Number result, const std::string& what) {
  if (result < 0) throw Hdf5Fault(what);
  return result;
}

class Handle {
 public:
  Handle(hid_t id, herr_t (*close)(hid_t), const std::string& what) : id_(need(id, what)), close_(close) {}
  ~Handle() {
    if (id_ >= 0) close_(id_);
  }
  Handle(Handle&& other) noexcept : id_(std::exchange(other.id_, -1)), close_(other.close_) {}
  Handle& operator=(Handle&&) = delete;
  operator hid_t() const { return id_; }

 private:
  hid_t id_;
  herr_t (*close_)(hid_t);
};

// HDF5 prints each fault by default; ours are values. This room alone calls HDF5, and the setting is a thread's own.
void silence() { H5Eset_auto2(H5E_DEFAULT, nullptr, nullptr); }

std::mutex one_at_a_time;  // the dimension-scale calls are not safe on several threads

Handle text_type(std::size_t size) {
  Handle type(H5Tcopy(H5T_C_S1), H5Tclose, "text type");
  need(H5Tset_size(type, size), "text size");
  need(H5Tset_cset(type, H5T_CSET_UTF8), "text encoding");
  need(H5Tset_strpad(type, size == H5T_VARIABLE ? H5T_STR_NULLTERM : H5T_STR_NULLPAD), "text padding");
  return type;
}

// ---- writing

class FileBuilder {
 public:
  explicit FileBuilder(const ResultSet& results) : results_(results), file_(new_file()) {
    for (const Axis& axis : results_.axes) by_name_[axis.name] = &axis;
  }

  std::vector<std::byte> build() {
    add_text_attribute(file_, "Conventions", conventions);
    for (const auto& [name, text] : results_.attributes) add_text_attribute(file_, name, text);
    for (const Axis& axis : results_.axes) add_axis(axis);
    for (const Variable& variable : results_.variables) add_variable(variable);
    for (const Flags& flags : results_.flags) add_flags(flags);
    for (const TextTable& text : results_.texts) add_text(text);
    return image();
  }

 private:
  static Handle new_file() {
    const Handle access(H5Pcreate(H5P_FILE_ACCESS), H5Pclose, "file access");
    need(H5Pset_fapl_core(access, 1 << 20, false), "file in memory");
    const Handle creation(H5Pcreate(H5P_FILE_CREATE), H5Pclose, "file creation");
    need(H5Pset_link_creation_order(creation, H5P_CRT_ORDER_TRACKED | H5P_CRT_ORDER_INDEXED), "link order");
    need(H5Pset_attr_creation_order(creation, H5P_CRT_ORDER_TRACKED | H5P_CRT_ORDER_INDEXED), "attribute order");
    need(H5Pset_obj_track_times(creation, false), "time stamps off");
    // HDF5 looks for an earlier file first: this name cannot have one.
    return {H5Fcreate("/dev/null/result", H5F_ACC_TRUNC, creation, access), H5Fclose, "the file in memory"};
  }

  std::vector<std::byte> image() const {
    need(H5Fflush(file_, H5F_SCOPE_GLOBAL), "flush");
    const ssize_t size = need(H5Fget_file_image(file_, nullptr, 0), "size of the file");
    std::vector<std::byte> bytes(static_cast<std::size_t>(size));
    need(H5Fget_file_image(file_, bytes.data(), bytes.size()), "image of the file");
    return bytes;
  }

  static void add_text_attribute(hid_t object, const std::string& name, const std::string& text) {
    const std::string shown = readable_text(text);
    const Handle type = text_type(std::max<std::size_t>(shown.size(), 1));
    const Handle space(H5Screate(shown.empty() ? H5S_NULL : H5S_SCALAR), H5Sclose, name);
    const Handle attribute(H5Acreate2(object, name.c_str(), type, space, H5P_DEFAULT, H5P_DEFAULT), H5Aclose, name);
    if (!shown.empty()) need(H5Awrite(attribute, type, shown.data()), name);
  }

  static void describe(hid_t data, const std::string& long_name, const std::string& units) {
    if (!long_name.empty()) add_text_attribute(data, "long_name", long_name);
    if (!units.empty()) add_text_attribute(data, "units", units);
  }

  static void add_number_attribute(hid_t object, const char* name, hid_t type, hsize_t size, const void* numbers) {
    const Handle space(H5Screate_simple(1, &size, nullptr), H5Sclose, name);
    const Handle attribute(H5Acreate2(object, name, type, space, H5P_DEFAULT, H5P_DEFAULT), H5Aclose, name);
    need(H5Awrite(attribute, type, numbers), name);
  }

  void add_axis(const Axis& axis) {
    const Handle type = axis.labelled() ? text_type(H5T_VARIABLE) : Handle(H5Tcopy(H5T_IEEE_F64LE), H5Tclose, "type");
    Handle data = new_dataset(axis.name, type, {axis.name});
    need(H5DSset_scale(data, axis.name.c_str()), axis.name);
    describe(data, axis.long_name, axis.units);
    if (axis.labelled()) write_texts(data, axis.labels);
    else write_numbers(data, H5T_NATIVE_DOUBLE, axis.values);
    scales_.emplace(axis.name, std::move(data));
  }

  void add_variable(const Variable& variable) {
    const double missing = std::numeric_limits<double>::quiet_NaN();
    const Handle data = new_dataset(variable.name, H5T_IEEE_F64LE, variable.axes, &missing);
    describe(data, variable.long_name, variable.units);
    add_number_attribute(data, "_FillValue", H5T_IEEE_F64LE, 1, &missing);
    write_numbers(data, H5T_NATIVE_DOUBLE, variable.values);
  }

  void add_flags(const Flags& flags) {
    const Handle data = new_dataset(flags.name, H5T_STD_I8LE, flags.axes);
    describe(data, flags.long_name, {});
    std::vector<signed char> numbers(flags.meanings.size());
    std::iota(numbers.begin(), numbers.end(), static_cast<signed char>(0));
    add_number_attribute(data, "flag_values", H5T_STD_I8LE, numbers.size(), numbers.data());
    std::string words;
    for (const std::string& word : flags.meanings) words += (words.empty() ? "" : " ") + word;
    add_text_attribute(data, "flag_meanings", words);
    write_numbers(data, H5T_NATIVE_SCHAR, flags.values);
  }

  void add_text(const TextTable& text) {
    const auto axes = text.axis.empty() ? std::vector<std::string>{} : std::vector{text.axis};
    const Handle data = new_dataset(text.name, text_type(H5T_VARIABLE), axes);
    describe(data, text.long_name, {});
    write_texts(data, text.values);
  }

  // An axis without entries is unlimited too: a chunk has at least one row, and netCDF knows no fixed length 0.
  static bool grows(const Axis& axis) { return axis.unlimited || axis.size() == 0; }

  Handle new_dataset(const std::string& name, hid_t type, const std::vector<std::string>& axes,
                     const double* fill = nullptr) {
    std::vector<hsize_t> shape, largest;
    bool chunked = false;
    for (const std::string& axis_name : axes) {
      const Axis& axis = *by_name_.at(axis_name);
      shape.push_back(axis.size());
      largest.push_back(grows(axis) ? H5S_UNLIMITED : axis.size());
      chunked = chunked || grows(axis);
    }
    const Handle creation(H5Pcreate(H5P_DATASET_CREATE), H5Pclose, name);
    need(H5Pset_attr_creation_order(creation, H5P_CRT_ORDER_TRACKED | H5P_CRT_ORDER_INDEXED), name);
    need(H5Pset_obj_track_times(creation, false), name);
    if (fill) need(H5Pset_fill_value(creation, H5T_NATIVE_DOUBLE, fill), name);
    if (chunked) set_chunks(creation, name, axes, type);

    const int rank = static_cast<int>(shape.size());
    const Handle space(H5Screate_simple(rank, shape.data(), largest.data()), H5Sclose, name);  // rank 0: a scalar
    Handle data(H5Dcreate2(file_, name.c_str(), type, space, H5P_DEFAULT, creation, H5P_DEFAULT), H5Dclose, name);
    for (unsigned i = 0; i < axes.size(); ++i) {
      const auto scale = scales_.find(axes[i]);  // an axis itself is not there yet: it needs no scale
      if (scale != scales_.end()) need(H5DSattach_scale(data, scale->second, i), name);
    }
    return data;
  }

  // 256 rows of a growing axis with the others whole; halved along the longest until the chunk fits.
  void set_chunks(hid_t creation, const std::string& name, const std::vector<std::string>& axes, hid_t type) const {
    std::vector<hsize_t> chunk;
    std::size_t bytes = H5Tget_size(type);
    for (const std::string& axis_name : axes) {
      const Axis& axis = *by_name_.at(axis_name);
      bytes *= axis.size();
      chunk.push_back(std::clamp<hsize_t>(axis.size(), 1, grows(axis) ? chunk_rows : axis.size() + 1));
    }
    const auto chunk_bytes = [&] {
      return std::accumulate(chunk.begin(), chunk.end(), hsize_t{H5Tget_size(type)}, std::multiplies<>());
    };
    while (chunk_bytes() > largest_chunk) {
      hsize_t& longest = *std::max_element(chunk.begin(), chunk.end());
      longest = (longest + 1) / 2;
    }
    need(H5Pset_chunk(creation, static_cast<int>(chunk.size()), chunk.data()), name);
    if (H5Tget_class(type) == H5T_STRING || bytes <= smallest_deflated) return;
    need(H5Pset_shuffle(creation), name);
    need(H5Pset_deflate(creation, 1), name);
  }

  template <class Number>
  static void write_numbers(hid_t data, hid_t type, const std::vector<Number>& numbers) {
    if (!numbers.empty()) need(H5Dwrite(data, type, H5S_ALL, H5S_ALL, H5P_DEFAULT, numbers.data()), "values");
  }

  static void write_texts(hid_t data, const std::vector<std::string>& texts) {
    std::vector<std::string> shown;
    std::vector<const char*> pointers;
    for (const std::string& text : texts) shown.push_back(readable_text(text));
    for (const std::string& text : shown) pointers.push_back(text.c_str());
    if (pointers.empty()) return;
    // Texts are converted through a buffer that the library clears for each call; its own choice is 1 MB.
    const Handle transfer(H5Pcreate(H5P_DATASET_XFER), H5Pclose, "values");
    need(H5Pset_buffer(transfer, std::clamp<std::size_t>(64 * pointers.size(), 4096, 1 << 20), nullptr, nullptr), "values");
    need(H5Dwrite(data, text_type(H5T_VARIABLE), H5S_ALL, H5S_ALL, transfer, pointers.data()), "values");
  }

  const ResultSet& results_;
  Handle file_;
  std::map<std::string, const Axis*> by_name_;
  std::map<std::string, Handle> scales_;
};

// ---- reading

class FileReader {
 public:
  explicit FileReader(const std::string& path) : file_(open(path)) {}

  ResultSet read() {
    const auto index = H5_INDEX_CRT_ORDER;
    need(H5Aiterate2(file_, index, H5_ITER_INC, nullptr, add_name<H5A_info_t>, &attribute_names_), "attributes");
    need(H5Literate(file_, index, H5_ITER_INC, nullptr, add_name<H5L_info_t>, &item_names_), "items");
    if (text_attribute(file_, "Conventions") != conventions) throw Hdf5Fault("not a results file");
    for (const std::string& name : attribute_names_)
      if (name != "Conventions") results_.attributes.emplace_back(name, text_attribute(file_, name.c_str()));
    for (const std::string& name : item_names_) read_item(name);
    return std::move(results_);
  }

 private:
  // No lock: a results file is only ever replaced as a whole, and locks fail on some network disks.
  static Handle open(const std::string& path) {
    std::error_code ignored;
    if (!std::filesystem::exists(path, ignored)) throw Hdf5Fault("there is no such file");
    const Handle access(H5Pcreate(H5P_FILE_ACCESS), H5Pclose, "file access");
    need(H5Pset_file_locking(access, false, true), "locks off");
    return {H5Fopen(path.c_str(), H5F_ACC_RDONLY, access), H5Fclose, "damaged, not allowed, or not HDF5"};
  }

  template <class Info>
  static herr_t add_name(hid_t, const char* name, const Info*, void* names) {
    static_cast<std::vector<std::string>*>(names)->emplace_back(name);
    return 0;
  }

  static std::string text_attribute(hid_t object, const char* name) {
    if (need(H5Aexists(object, name), name) == 0) return {};  // left out when empty
    const Handle attribute(H5Aopen(object, name, H5P_DEFAULT), H5Aclose, name);
    const Handle type(H5Aget_type(attribute), H5Tclose, name);
    const Handle space(H5Aget_space(attribute), H5Sclose, name);
    if (H5Tget_class(type) != H5T_STRING || H5Tis_variable_str(type) != 0)
      throw Hdf5Fault(std::string("attribute '") + name + "' is not a text of fixed length");
    if (H5Sget_simple_extent_npoints(space) != 1) return {};
    std::string text(H5Tget_size(type), '\0');
    need(H5Aread(attribute, type, text.data()), name);
    text.erase(text.find_last_not_of('\0') + 1);
    return text;
  }

  void read_item(const std::string& name) {
    const Handle data(H5Dopen2(file_, name.c_str(), H5P_DEFAULT), H5Dclose, "item '" + name + "' is not a dataset");
    const Handle type(H5Dget_type(data), H5Tclose, name);
    const H5T_class_t kind = H5Tget_class(type);
    const std::string long_name = text_attribute(data, "long_name");
    const std::string units = text_attribute(data, "units");
    if (need(H5DSis_scale(data), name) > 0) {
      Axis axis{name, long_name, units, {}, {}, grows(data)};
      if (kind == H5T_STRING) axis.labels = read_texts(data);
      else axis.values = read_numbers<double>(data, H5T_NATIVE_DOUBLE);
      results_.axes.push_back(std::move(axis));
    } else if (kind == H5T_FLOAT) {
      results_.variables.push_back(
          {name, long_name, units, axes_of(data), read_numbers<double>(data, H5T_NATIVE_DOUBLE)});
    } else if (kind == H5T_INTEGER && H5Tget_size(type) == 1) {
      results_.flags.push_back({name, long_name, axes_of(data), read_numbers<signed char>(data, H5T_NATIVE_SCHAR),
                                words(text_attribute(data, "flag_meanings"))});
    } else if (kind == H5T_STRING) {
      const std::vector<std::string> axes = axes_of(data);
      results_.texts.push_back({name, long_name, axes.empty() ? "" : axes[0], read_texts(data)});
    } else {
      throw Hdf5Fault("item '" + name + "' is of a type that no results file holds");
    }
  }

  static std::vector<std::string> words(const std::string& text) {
    std::istringstream stream(text);
    return {std::istream_iterator<std::string>(stream), {}};
  }

  static bool grows(hid_t data) {
    const Handle space(H5Dget_space(data), H5Sclose, "shape");
    if (H5Sget_simple_extent_ndims(space) != 1) throw Hdf5Fault("a coordinate has not one dimension");
    hsize_t size = 0, largest = 0;
    need(H5Sget_simple_extent_dims(space, &size, &largest), "shape");
    return largest == H5S_UNLIMITED;
  }

  static herr_t take_scale_name(hid_t, unsigned, hid_t scale, void* name) {
    char text[256] = "";
    if (H5DSget_scale_name(scale, text, sizeof text) < 0) return -1;
    *static_cast<std::string*>(name) = text;
    return 1;  // the first is the only one
  }

  static std::vector<std::string> axes_of(hid_t data) {
    const Handle space(H5Dget_space(data), H5Sclose, "shape");
    std::vector<std::string> axes(static_cast<std::size_t>(need(H5Sget_simple_extent_ndims(space), "shape")));
    for (unsigned i = 0; i < axes.size(); ++i) {
      need(H5DSiterate_scales(data, i, nullptr, take_scale_name, &axes[i]), "axes");
      if (axes[i].empty()) throw Hdf5Fault("a dimension has no coordinate");
    }
    return axes;
  }

  template <class Number>
  static std::vector<Number> read_numbers(hid_t data, hid_t type) {
    const Handle space(H5Dget_space(data), H5Sclose, "shape");
    std::vector<Number> numbers(static_cast<std::size_t>(need(H5Sget_simple_extent_npoints(space), "shape")));
    if (!numbers.empty()) need(H5Dread(data, type, H5S_ALL, H5S_ALL, H5P_DEFAULT, numbers.data()), "damaged values");
    return numbers;
  }

  static std::vector<std::string> read_texts(hid_t data) {
    const Handle type = text_type(H5T_VARIABLE);
    const std::vector<char*> pointers = read_numbers<char*>(data, type);
    std::vector<std::string> texts;
    for (char* text : pointers) {
      texts.emplace_back(text ? text : "");
      need(H5free_memory(text), "memory");
    }
    return texts;
  }

  Handle file_;
  ResultSet results_;
  std::vector<std::string> attribute_names_;
  std::vector<std::string> item_names_;
};

}  // namespace

FileOutcome write_result_file(const ResultSet& results, const std::string& path) {
  check_result_set(results);
  std::vector<std::byte> bytes;
  try {
    const std::lock_guard lock(one_at_a_time);
    silence();
    bytes = FileBuilder(results).build();
  } catch (const Hdf5Fault& fault) {
    return {false, path + ": not written: HDF5 could not make " + fault.what()};
  }
  return write_whole_file(path, bytes);
}

std::optional<ResultSet> read_result_file(const std::string& path, std::string& fault) {
  try {
    const std::lock_guard lock(one_at_a_time);
    silence();
    return FileReader(path).read();
  } catch (const Hdf5Fault& problem) {
    fault = path + ": not read: " + problem.what();
    return std::nullopt;
  }
}

}  // namespace leat
