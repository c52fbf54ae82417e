// sim/input: YAML as nodes with places, what is refused and where, and the typed readers.
#include <gtest/gtest.h>

#include <cstdio>
#include <filesystem>
#include <fstream>

#include "sim/input/typed_reader.hpp"
#include "sim/input/yaml_document.hpp"

namespace leat {
namespace {

// The faults of a text, one a line, "" when it is read.
std::string faults_of(std::string_view text) {
  Diagnostics diagnostics;
  const std::optional<YamlNode> root = read_yaml(text, "f.yaml", diagnostics);
  EXPECT_EQ(root.has_value(), diagnostics.ok()) << text;
  std::string all;
  for (const Diagnostic& fault : diagnostics.faults()) all += (all.empty() ? "" : "\n") + to_string(fault);
  return all;
}

YamlNode read(std::string_view text) {
  Diagnostics diagnostics;
  std::optional<YamlNode> root = read_yaml(text, "f.yaml", diagnostics);
  for (const Diagnostic& fault : diagnostics.faults()) ADD_FAILURE() << to_string(fault);
  return root ? *root : YamlNode{};
}

TEST(yaml_document, reads_nodes_with_places) {
  const YamlNode root = read("# a comment\ncircuit:\n  L1: {volume: 120 m3, kind: \"tank\"}\nfeed:\n  - chalcocite\n  - grade: 8 %\n    size: 75 um\nnote: |\n  two\n  lines\n");
  ASSERT_TRUE(root.is_map());
  ASSERT_EQ(root.entries.size(), 3u);
  const YamlNode* volume = root.find("circuit")->find("L1")->find("volume");
  ASSERT_NE(volume, nullptr);
  EXPECT_EQ(volume->text, "120 m3");
  EXPECT_FALSE(volume->quoted);
  EXPECT_EQ(to_string(volume->place), "f.yaml:3:16 circuit.L1.volume");
  EXPECT_TRUE(root.find("circuit")->find("L1")->find("kind")->quoted);
  const YamlNode* feed = root.find("feed");
  ASSERT_TRUE(feed->is_list());
  EXPECT_EQ(to_string(feed->items[0].place), "f.yaml:5:5 feed[0]");
  EXPECT_EQ(to_string(feed->items[1].find("size")->place), "f.yaml:7:11 feed[1].size");
  EXPECT_EQ(to_string(feed->items[1].entries[1].key_place), "f.yaml:7:5 feed[1].size");
  EXPECT_EQ(root.find("note")->text, "two\nlines\n");
  EXPECT_EQ(root.find("nothing"), nullptr);
}

TEST(yaml_document, counts_columns_in_characters) {
  EXPECT_EQ(to_string(read("{\u00e9\u00e9: \u03bc, b: x}").find("b")->place), "f.yaml:1:12 b");
}

TEST(yaml_document, skips_a_byte_order_mark) {
  EXPECT_EQ(to_string(read("\xEF\xBB\xBF" "a: 'x'\n").find("a")->place), "f.yaml:1:4 a");
}

TEST(yaml_document, takes_line_ends_with_carriage_return) {
  const YamlNode root = read("a: 1\r\nb: \"x\"\r\nc:\r\n  - 2\r\n");
  EXPECT_EQ(root.find("a")->text, "1");
  EXPECT_EQ(to_string(root.find("b")->place), "f.yaml:2:4 b");
  EXPECT_EQ(to_string(root.find("c")->items[0].place), "f.yaml:4:5 c[0]");
}

TEST(yaml_document, resolves_quotes) {
  EXPECT_EQ(read("a: 'it''s'\n").find("a")->text, "it's");
  EXPECT_EQ(read("a: \"q\\\"w\\\\\"\n").find("a")->text, "q\"w\\");
  EXPECT_EQ(read("a: \"x\ty\"\n").find("a")->text, "x\ty");
  EXPECT_EQ(read("a: 'two\n  lines'\nb: 1\n").find("a")->text, "two lines");
  EXPECT_EQ(read("a: ''\n").find("a")->text, "");
  EXPECT_EQ(read("\"a b\": 1\n").find("a b")->text, "1");
}

TEST(yaml_document, keeps_words_as_text) {
  EXPECT_EQ(read("a: yes\n").find("a")->text, "yes");
  EXPECT_EQ(read("a: 010\n").find("a")->text, "010");
  EXPECT_EQ(read("a: .nan\n").find("a")->text, ".nan");
}

TEST(yaml_document, refuses_a_key_given_twice) {
  EXPECT_EQ(faults_of("a:\n  b: 1\n  c: 2\n  b: 3\n"), "f.yaml:4:3 a.b: 'b' is given twice; it stands already in line 2");
  EXPECT_EQ(faults_of("{a: 1, a: 2}"), "f.yaml:1:8 a: 'a' is given twice; it stands already in line 1");
  EXPECT_EQ(faults_of("a: 1\n'a': 2\n"), "f.yaml:2:1 a: 'a' is given twice; it stands already in line 1");
}

TEST(yaml_document, refuses_a_quote_that_never_closes) {
  EXPECT_EQ(faults_of("x: 1\na: \"b\nc: 1\nd: 2\n"), "f.yaml:2:4 a: the quote \" is opened here and never closed");
  EXPECT_EQ(faults_of("a: 'b\nc: 1\n"), "f.yaml:1:4 a: the quote ' is opened here and never closed");
  EXPECT_EQ(faults_of("a: 'b''\nc: 1\n"), "f.yaml:1:4 a: the quote ' is opened here and never closed");
  EXPECT_EQ(faults_of("a: \"b\\\"\nc: 1\n"), "f.yaml:1:4 a: the quote \" is opened here and never closed");
  EXPECT_EQ(faults_of("a: \"b\nc: \"d\"\n"),
            "f.yaml:2:5 a: text that belongs to no key; check the indentation, quotes and brackets before it; is the quote opened in line 1 closed "
            "where it should be?");
}

TEST(yaml_document, refuses_text_left_over) {
  const std::string left_over = "text left over behind the end of the document; check indentation and brackets";
  EXPECT_EQ(faults_of("{a: 1} b\n"), "f.yaml:1:8: " + left_over);
  EXPECT_EQ(faults_of("- a\nb: 1\n"), "f.yaml:2:1: " + left_over);
  EXPECT_EQ(faults_of("  a: 1\n b: 2\n"), "f.yaml:2:2: " + left_over);
  EXPECT_EQ(faults_of("a: 1\n...\nb: 2\n"), "f.yaml:3:1: " + left_over);
  EXPECT_EQ(faults_of("a: 1\n%YAML 1.2\n"), "f.yaml:2:1: a line that starts with '%' is a directive, which is not read; remove it");
}

TEST(yaml_document, refuses_a_word_without_colon) {
  EXPECT_EQ(faults_of("a: 1\nlast"), "f.yaml:2:1 last: 'last' has no value; write one after a colon and a blank, or leave the key out");
  EXPECT_EQ(faults_of("a: 1\nlast\n"), "f.yaml:2:1 last: 'last' has no value; write one after a colon and a blank, or leave the key out");
  EXPECT_EQ(faults_of("a:1\n"), "f.yaml:1:1: the file holds a single text; write 'key: value', with a blank behind the colon");
  EXPECT_EQ(faults_of("{a:1, b: 2}\n"), "f.yaml:1:2 a:1: 'a:1' has no value; write one after a colon and a blank, or leave the key out");
}

TEST(yaml_document, refuses_a_second_document) {
  EXPECT_EQ(faults_of("a: 1\n---\nb: 2\n"), "f.yaml:2:1: a second document; one file holds one document");
  EXPECT_EQ(faults_of("---\na: 1\n"), "");
  EXPECT_EQ(faults_of("a: 1\n...\n"), "");
}

TEST(yaml_document, refuses_empty_values) {
  const std::string none = " has no value; write one after a colon and a blank, or leave the key out";
  EXPECT_EQ(faults_of("a:\nb: ~\nc: null\n"), "f.yaml:1:1 a: 'a'" + none + "\nf.yaml:2:1 b: 'b'" + none + "\nf.yaml:3:1 c: 'c'" + none);
  EXPECT_EQ(faults_of("a: [1,,2]\n"), "f.yaml:1:7 a[1]: an empty value (nothing); write a value or leave it out");
  EXPECT_EQ(faults_of("a:\n  - ~\n"), "f.yaml:2:5 a[0]: an empty value ('~'); write a value or leave it out");
  EXPECT_EQ(faults_of("~: 1\n"), "f.yaml:1:1: an empty key; write a word before the colon");
  EXPECT_EQ(faults_of("'': 1\n"), "f.yaml:1:1: an empty key; write a word before the colon");
  EXPECT_EQ(faults_of(""), "f.yaml:1:1: the file holds nothing; write at least one 'key: value'");
  EXPECT_EQ(faults_of("# only a comment\n"), "f.yaml:1:1: the file holds nothing; write at least one 'key: value'");
}

TEST(yaml_document, refuses_anchors_aliases_and_merges) {
  EXPECT_EQ(faults_of("a: &x 1\nb: *x\n"),
            "f.yaml:1:4 a: an anchor ('&name') is not read; remove it\nf.yaml:2:4 b: an alias ('*name') is not read; write the value out");
  EXPECT_EQ(faults_of("a: *x\n"), "f.yaml:1:4 a: an alias ('*name') is not read; write the value out");
  EXPECT_EQ(faults_of("a: &x [*x]\n"),
            "f.yaml:1:4 a: an anchor ('&name') is not read; remove it\nf.yaml:1:8 a[0]: an alias ('*name') is not read; write the value out");
  EXPECT_EQ(faults_of("a: &x {b: 1}\n"), "f.yaml:1:4 a: an anchor ('&name') is not read; remove it");
  EXPECT_EQ(faults_of("<<: {a: 1}\n"), "f.yaml:1:1 <<: a merge ('<<') is not read; write the keys out");
}

TEST(yaml_document, refuses_tags) {
  for (const char* text : {"a: !!str 1\n", "a: !mine 1\n", "a: ! 1\n", "a: !<?> 1\n", "a: ! 'x'\n", "a: !!map {b: 1}\n", "a: ! [b]\n", "a: !<?> [b]\n"}) {
    EXPECT_EQ(faults_of(text), "f.yaml:1:4 a: a tag ('!name') is not read; remove it") << text;
  }
}

TEST(yaml_document, refuses_a_list_or_map_as_key) {
  EXPECT_EQ(faults_of("? [a]\n: b\n"), "f.yaml:1:3: a list or map used as a key; a key is a word");
  EXPECT_EQ(faults_of("x:\n  {a: 1}: b\n"), "f.yaml:2:3 x: a list or map used as a key; a key is a word");
}

TEST(yaml_document, refuses_what_is_not_utf8) {
  const std::string fault = "the text is not UTF-8; save the file in that encoding";
  EXPECT_EQ(faults_of("a: 1\nb: \xB5m\n"), "f.yaml:2:4: " + fault);      // Latin-1 micro sign
  EXPECT_EQ(faults_of("a: \xC0\x80\n"), "f.yaml:1:4: " + fault);         // overlong
  EXPECT_EQ(faults_of("a: \xE0\x80\xAF\n"), "f.yaml:1:4: " + fault);
  EXPECT_EQ(faults_of("a: \xED\xA0\x80\n"), "f.yaml:1:4: " + fault);     // half of a surrogate pair
  EXPECT_EQ(faults_of("a: \xF4\x90\x80\x80\n"), "f.yaml:1:4: " + fault); // beyond the last character
  EXPECT_EQ(faults_of("a: \xE2\x82"), "f.yaml:1:4: " + fault);           // cut off
  EXPECT_EQ(faults_of("\xFF\xFE" "a\0"), "f.yaml:1:1: " + fault);        // UTF-16
}

TEST(yaml_document, refuses_characters_that_cannot_be_seen) {
  EXPECT_EQ(faults_of(std::string_view("a: 1\0\nb: 2\n", 11)), "f.yaml:1:5: a NUL character in the text; is this a text file?");
  // The parser takes this one for the end of the file.
  EXPECT_EQ(faults_of("a: 1\n\x04" "b: 2\n"), "f.yaml:2:1: a control character that cannot be seen; remove it");
  EXPECT_EQ(faults_of("a: 1\rb: 2\n"), "f.yaml:1:5: a carriage return without a line feed; end lines with a line feed");
  EXPECT_EQ(faults_of("a: x\u2028b: y\n"), "f.yaml:1:5: a line or paragraph separator that cannot be seen; write a line feed");
  EXPECT_EQ(faults_of("a: \uFEFFb\n"), "f.yaml:1:4: a byte-order mark inside the text; remove it");
}

TEST(yaml_document, refuses_escapes_that_make_no_text) {
  const std::string fault = "f.yaml:1:4 a: an escape makes a character that cannot be seen or is not UTF-8";
  for (const char* text : {"a: \"\\0\"\n", "a: \"\\x04\"\n", "a: \"\\u0000b\"\n"}) EXPECT_EQ(faults_of(text), fault) << text;
  EXPECT_NE(faults_of("a: \"\\uD800\"\n"), "");
  EXPECT_EQ(faults_of("a: \"it\\'s\"\n"), "f.yaml:1:4 a: \\' is no escape; an apostrophe stands as it is");
  EXPECT_EQ(read("a: \"\\u00b5m\\n\"\n").find("a")->text, "\u00b5m\n");
}

TEST(yaml_document, refuses_deep_nesting) {
  const auto nested = [](int depth) { return std::string(static_cast<std::size_t>(depth), '[') + "x" + std::string(static_cast<std::size_t>(depth), ']'); };
  EXPECT_EQ(faults_of(nested(64)), "");
  const std::string fault = faults_of(nested(65));
  EXPECT_TRUE(fault.starts_with("f.yaml:1:65 [0][0]")) << fault;
  EXPECT_TRUE(fault.ends_with("lists and maps are nested deeper than 64")) << fault;
  EXPECT_NE(faults_of(std::string(100000, '[')), "");
  EXPECT_NE(faults_of(std::string(100000, '{')), "");
}

TEST(yaml_document, says_what_to_do_about_bad_syntax) {
  EXPECT_EQ(faults_of("a: b: c\n"), "f.yaml:1:5 a: a ': ' that cannot stand here; check the indentation, and put quotes around a text that holds ': '");
  EXPECT_EQ(faults_of("a: 1\n  b: 2\n"), "f.yaml:2:4 a: a ': ' that cannot stand here; check the indentation, and put quotes around a text that holds ': '");
  EXPECT_EQ(faults_of("a: [1, 2\nb: 1\n"), "f.yaml:2:2 a[2]: a list opened by '[' that is not closed; write ',' between items and ']' at the end");
  EXPECT_EQ(faults_of("a: \"x\" y\n"), "f.yaml:1:8 a: text that belongs to no key; check the indentation, quotes and brackets before it");
  EXPECT_EQ(faults_of("a: [x]]\n"), "f.yaml:1:7 a: a ']' or '}' that nothing has opened");
  EXPECT_EQ(faults_of("a: @x\n"), "f.yaml:1:4 a: a text that starts with a reserved sign (@ ` % ? or a tab); put it in quotes");
}

TEST(yaml_document, refuses_indentation_that_misleads) {
  EXPECT_EQ(faults_of("a:\n\tb: 1\n"), "f.yaml:2:1: a tab in the indentation; indent with blanks");
  EXPECT_EQ(faults_of("a:\n-\tb\n"), "f.yaml:2:2: a tab in the indentation; indent with blanks");
  EXPECT_EQ(faults_of("a: |\n  \tb\n"), "f.yaml:2:3: a tab in the indentation; indent with blanks");
  const std::string not_deeper = "a value in a line of its own must be indented deeper than its key";
  EXPECT_EQ(faults_of("a:\n\"b\nc\"\n"), "f.yaml:2:1 a: " + not_deeper);
  EXPECT_EQ(faults_of("a:\n{b: 1}\n"), "f.yaml:2:1 a: " + not_deeper);
  EXPECT_EQ(faults_of("a:\n[b]\n"), "f.yaml:2:1 a: " + not_deeper);
  EXPECT_EQ(faults_of("a:\n-5\n"), "f.yaml:1:1 a: 'a' has no value; write one after a colon and a blank, or leave the key out\n"
                                   "f.yaml:2:1 -5: '-5' has no value; write one after a colon and a blank, or leave the key out");
  EXPECT_EQ(faults_of("a:\n-\n  b\n"), "");
  EXPECT_EQ(faults_of("a:\n- b\nc:\n  d\ne: {f:\ng}\n"), "");
}

TEST(yaml_document, refuses_rare_spellings) {
  EXPECT_EQ(faults_of("? a\n: b\n"), "f.yaml:1:3: a key behind a '?' is not read; write 'key: value'");
  EXPECT_EQ(faults_of("x: {? a : b}\n"), "f.yaml:1:7 x: a key behind a '?' is not read; write 'key: value'");
  EXPECT_EQ(faults_of("a: what ?\nb: 1\n"), "");
  EXPECT_EQ(faults_of("a: [:x]\n"), "f.yaml:1:5 a[0]: a text that starts with ':'; put it in quotes");
  EXPECT_EQ(read("a: >-\n  b\n  \n").find("a")->text, "b");
}

TEST(yaml_document, lists_several_faults_at_once) {
  EXPECT_EQ(faults_of("a: !x 1\nb: &y 2\nb: 3\n"),
            "f.yaml:1:4 a: a tag ('!name') is not read; remove it\nf.yaml:2:4 b: an anchor ('&name') is not read; remove it\n"
            "f.yaml:3:1 b: 'b' is given twice; it stands already in line 2");
}

TEST(yaml_document, reads_a_file_or_says_why_not) {
  const std::string folder = std::filesystem::temp_directory_path().string();
  Diagnostics diagnostics;
  EXPECT_FALSE(read_yaml_file(folder + "/no_such_flowsheet.yaml", diagnostics));
  EXPECT_FALSE(read_yaml_file(folder, diagnostics));
  ASSERT_EQ(diagnostics.faults().size(), 2u);
  EXPECT_EQ(to_string(diagnostics.faults()[0]), folder + "/no_such_flowsheet.yaml: cannot be read: No such file or directory");
  EXPECT_EQ(to_string(diagnostics.faults()[1]), folder + ": cannot be read: it is a folder");

  const std::string path = folder + "/yaml_document_test.yaml";
  std::ofstream(path) << "a: 1\n";
  Diagnostics fine;
  const std::optional<YamlNode> root = read_yaml_file(path, fine);
  std::filesystem::remove(path);
  ASSERT_TRUE(root);
  EXPECT_EQ(to_string(root->find("a")->place), path + ":1:4 a");
}

TEST(yaml_document, refuses_more_than_64_megabytes) {
  Diagnostics diagnostics;
  EXPECT_FALSE(read_yaml(std::string(yaml_size_limit + 1, '#'), "f.yaml", diagnostics));
  EXPECT_EQ(to_string(diagnostics.faults().at(0)), "f.yaml: the text is longer than 64 MB");
}

// ---- typed readers

// What one typed reading of the value under `x` says: "" or its only fault.
template <class Read>
std::string typed_fault(std::string_view text, Read read_value) {
  const YamlNode root = read(text);
  Diagnostics diagnostics;
  TypedReader reader(diagnostics);
  read_value(reader, *root.find("x"));
  EXPECT_LE(diagnostics.faults().size(), 1u) << text;
  return diagnostics.ok() ? "" : to_string(diagnostics.faults()[0]);
}

TEST(typed_reader, quantity_reads_in_si) {
  const YamlNode root = read("c: 4 mol/L\nt: \"6 h\"\nT: 25 degC\nw: 8 %\nv: 0.08\ndT: 5 degC\n");
  Diagnostics diagnostics;
  TypedReader reader(diagnostics);
  EXPECT_DOUBLE_EQ(*reader.quantity(*root.find("c"), "mol/m3"), 4000);
  EXPECT_DOUBLE_EQ(*reader.quantity(*root.find("t"), "s", 0, 1e6), 21600);
  EXPECT_DOUBLE_EQ(*reader.quantity(*root.find("T"), "K", 273.15, 373.15), 298.15);
  EXPECT_DOUBLE_EQ(*reader.quantity(*root.find("w"), "1", 0, 1), 0.08);
  EXPECT_DOUBLE_EQ(*reader.quantity(*root.find("v"), "1", 0, 1), 0.08);
  EXPECT_DOUBLE_EQ(*reader.difference(*root.find("dT"), "K", 0, 10), 5);
  EXPECT_TRUE(diagnostics.ok());
}

TEST(typed_reader, quantity_says_what_is_wrong) {
  const auto time = [](TypedReader& r, const YamlNode& n) { EXPECT_FALSE(r.quantity(n, "s", 0, 1e6)); };
  EXPECT_EQ(typed_fault("# head\nx: 6 kg\n", time), "f.yaml:2:4 x: 6 kg is not a time; write for example 6 h");
  EXPECT_EQ(typed_fault("x: 6\n", time), "f.yaml:1:4 x: 6 has no unit; a time is needed, write for example 6 h");
  EXPECT_EQ(typed_fault("x: 6 hours\n", time), "f.yaml:1:4 x: 'hours' is written h");
  EXPECT_EQ(typed_fault("x: -6 h\n", time), "f.yaml:1:4 x: -6 h is out of range; allowed is 0 to 1000000 s");
  EXPECT_EQ(typed_fault("x: .nan\n", time), "f.yaml:1:4 x: '.nan' does not start with a number");
  EXPECT_EQ(typed_fault("x: 010 h\n", time), "f.yaml:1:4 x: '010 h' has a leading zero; leave it out");
  EXPECT_EQ(typed_fault("x: [6 h]\n", time), "f.yaml:1:4 x: a list stands here; a number with a unit is needed");
  EXPECT_EQ(typed_fault("x: {a: 6 h}\n", time), "f.yaml:1:4 x: a map of keys stands here; a number with a unit is needed");
  EXPECT_EQ(typed_fault("x: 5 degC\n", [](TypedReader& r, const YamlNode& n) { r.quantity(n, "K", 300); }),
            "f.yaml:1:4 x: 5 degC is out of range; allowed is at least 300 K");
  EXPECT_EQ(typed_fault("x: 120 %\n", [](TypedReader& r, const YamlNode& n) { r.quantity(n, "1", 0, 1); }),
            "f.yaml:1:4 x: 120 % is out of range; allowed is 0 to 1");
  Diagnostics diagnostics;
  EXPECT_THROW(TypedReader(diagnostics).quantity(read("x: 1\n"), "furlong"), std::logic_error);
}

TEST(typed_reader, number_is_plain) {
  const auto number = [](TypedReader& r, const YamlNode& n) { r.number(n, 0, 10); };
  EXPECT_EQ(typed_fault("x: 2.5e-1\n", number), "");
  EXPECT_EQ(typed_fault("x: 5 h\n", number), "f.yaml:1:4 x: 5 h has a unit; a plain number is needed");
  EXPECT_EQ(typed_fault("x: 11\n", number), "f.yaml:1:4 x: 11 is out of range; allowed is 0 to 10");
  EXPECT_EQ(typed_fault("x: .inf\n", number), "f.yaml:1:4 x: '.inf' does not start with a number");
  EXPECT_EQ(typed_fault("x: 010\n", number), "f.yaml:1:4 x: '010' has a leading zero; leave it out");
  EXPECT_EQ(typed_fault("x: \"5\"\n", number), "f.yaml:1:4 x: '5' is a text in quotes; a number is needed, without quotes");
}

TEST(typed_reader, whole_number_has_digits_only) {
  const auto whole = [](TypedReader& r, const YamlNode& n) { r.whole_number(n, 1, 9); };
  EXPECT_EQ(typed_fault("x: 3\n", whole), "");
  EXPECT_EQ(typed_fault("x: 0\n", whole), "f.yaml:1:4 x: 0 is out of range; allowed is 1 to 9");
  for (const char* text : {"3.0", "03", "-0", "0x3", "3e0", "99999999999999999999", "three"}) {
    EXPECT_EQ(typed_fault("x: " + std::string(text) + "\n", whole),
              "f.yaml:1:4 x: '" + std::string(text) + "' is not a whole number; write digits only, such as 3");
  }
}

TEST(typed_reader, yes_no_is_true_or_false) {
  const auto yes_no = [](TypedReader& r, const YamlNode& n) { r.yes_no(n); };
  EXPECT_EQ(typed_fault("x: true\n", yes_no), "");
  EXPECT_EQ(typed_fault("x: yes\n", yes_no), "f.yaml:1:4 x: 'yes' is neither true nor false; write one of the two");
  EXPECT_EQ(typed_fault("x: \"true\"\n", yes_no), "f.yaml:1:4 x: 'true' is a text in quotes; true or false is needed, without quotes");
}

TEST(typed_reader, texts_and_lists) {
  const YamlNode root = read("one: a\nmany: [a, b]\nnone: []\nbad: [a, [b]]\nempty: ' '\n");
  Diagnostics diagnostics;
  TypedReader reader(diagnostics);
  EXPECT_EQ(reader.text_list(*root.find("one")), std::vector<std::string>{"a"});
  EXPECT_EQ(reader.text_list(*root.find("many")), (std::vector<std::string>{"a", "b"}));
  EXPECT_TRUE(reader.text_list(*root.find("none")).empty());
  EXPECT_EQ(*reader.text(*root.find("one")), "a");
  EXPECT_TRUE(reader.is_map(root));
  EXPECT_TRUE(diagnostics.ok());
  reader.text_list(*root.find("bad"));
  reader.text(*root.find("empty"));
  reader.is_map(*root.find("one"));
  reader.is_list(root);
  ASSERT_EQ(diagnostics.faults().size(), 4u);
  EXPECT_EQ(to_string(diagnostics.faults()[0]), "f.yaml:4:10 bad[1]: a list stands here; a text is needed");
  EXPECT_EQ(to_string(diagnostics.faults()[1]), "f.yaml:5:8 empty: the text is empty");
  EXPECT_EQ(to_string(diagnostics.faults()[2]), "f.yaml:1:6 one: 'a' stands here; a map of 'key: value' is needed");
  EXPECT_EQ(to_string(diagnostics.faults()[3]), "f.yaml:1:1: a map of keys stands here; a list is needed, such as [a, b]");
}

TEST(typed_reader, keys_are_known_and_complete) {
  const YamlNode root = read("circuit:\n  L1:\n    volum: 3 m3\n    zzzzzz: 1\n");
  const std::vector<std::string> allowed = {"volume", "kind"};
  Diagnostics diagnostics;
  TypedReader reader(diagnostics);
  const YamlNode& tank = *root.find("circuit")->find("L1");
  reader.only_keys(tank, allowed);
  EXPECT_EQ(reader.required(tank, "kind"), nullptr);
  EXPECT_NE(reader.required(tank, "volum"), nullptr);
  ASSERT_EQ(diagnostics.faults().size(), 3u);
  EXPECT_EQ(to_string(diagnostics.faults()[0]), "f.yaml:3:5 circuit.L1.volum: 'volum' is not a key here; did you mean 'volume'? Allowed: volume, kind");
  EXPECT_EQ(to_string(diagnostics.faults()[1]), "f.yaml:4:5 circuit.L1.zzzzzz: 'zzzzzz' is not a key here; allowed: volume, kind");
  EXPECT_EQ(to_string(diagnostics.faults()[2]), "f.yaml:3:5 circuit.L1.kind: 'kind' is needed here and missing");
  EXPECT_EQ(diagnostics.faults()[2].code, Code::missing_key);
}

TEST(typed_reader, choice_names_the_allowed_words) {
  const std::vector<std::string> allowed = {"tank", "thickener"};
  const auto choice = [&](TypedReader& r, const YamlNode& n) { r.choice(n, allowed); };
  EXPECT_EQ(typed_fault("x: tank\n", choice), "");
  EXPECT_EQ(typed_fault("x: tnak\n", choice), "f.yaml:1:4 x: 'tnak' is not known here; did you mean 'tank'? Allowed: tank, thickener");
}

}  // namespace
}  // namespace leat
