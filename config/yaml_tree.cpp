#include "config/yaml_tree.hpp"

#include <exception>
#include <map>
#include <sstream>
#include <utility>
#include <yaml-cpp/anchor.h>
#include <yaml-cpp/eventhandler.h>
#include <yaml-cpp/exceptions.h>
#include <yaml-cpp/parser.h>

namespace sagitta::config {
namespace {

using estimator::ErrorCode;
using estimator::fail;
using estimator::Result;

/// Carries a refusal through the parser; caught in parse_yaml.
struct Refusal : std::exception {
    Refusal(const YAML::Mark& where, std::string why) : mark{where}, reason{std::move(why)} {}
    YAML::Mark mark;
    std::string reason;
};

std::size_t offset_of(const YAML::Mark& mark) {
    return static_cast<std::size_t>(mark.pos);
}

/// Builds the tree from the parser's events. Refusing while events come keeps the parser, which
/// recurses with the depth of the document, from ever going deeper than allowed.
class TreeBuilder : public YAML::EventHandler {
public:
    void OnDocumentStart(const YAML::Mark& mark) override {
        if (m_has_document) {
            throw Refusal{mark, "the document should end here; a file holds only one"};
        }
        m_has_document = true;
    }
    void OnDocumentEnd() override {}

    void OnNull(const YAML::Mark& mark, YAML::anchor_t anchor) override {
        refuse_anchor(mark, anchor);
        add(make(mark, YamlNode::Kind::empty));
    }
    void OnAlias(const YAML::Mark& mark, YAML::anchor_t /*anchor*/) override {
        throw Refusal{mark, "aliases (*name) are not allowed; write the value out"};
    }
    void OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                  const std::string& value) override {
        refuse_anchor(mark, anchor);
        refuse_tag(mark, tag);
        if (wants_key()) {
            take_key(mark, value);
            return;
        }
        YamlNode node = make(mark, YamlNode::Kind::scalar);
        node.text = value;
        node.quoted = tag == k_quoted;
        add(std::move(node));
    }
    void OnSequenceStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                         YAML::EmitterStyle::value /*style*/) override {
        open(mark, tag, anchor, YamlNode::Kind::list);
    }
    void OnSequenceEnd() override { close(); }
    void OnMapStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                    YAML::EmitterStyle::value /*style*/) override {
        open(mark, tag, anchor, YamlNode::Kind::map);
    }
    void OnMapEnd() override { close(); }

    [[nodiscard]] YamlNode take_root() { return std::move(m_root); }

private:
    // What the parser gives as the tag of scalars without one.
    static constexpr const char* k_plain = "?";
    static constexpr const char* k_quoted = "!";

    struct Open {
        YamlNode node;
        std::map<std::string, int> keys; ///< with their lines, from 1
        std::string key;
        std::size_t key_offset = 0;
        bool has_key = false;
    };

    static void refuse_anchor(const YAML::Mark& mark, YAML::anchor_t anchor) {
        if (anchor != YAML::NullAnchor) {
            throw Refusal{mark, "anchors (&name) are not allowed; write the value out"};
        }
    }
    static void refuse_tag(const YAML::Mark& mark, const std::string& tag) {
        if (!tag.empty() && tag != k_plain && tag != k_quoted) {
            throw Refusal{mark, "tags (!name) are not allowed; write the value without"};
        }
    }

    [[nodiscard]] bool wants_key() const {
        return !m_open.empty() && m_open.back().node.kind == YamlNode::Kind::map &&
               !m_open.back().has_key;
    }

    YamlNode make(const YAML::Mark& mark, YamlNode::Kind kind) {
        if (wants_key()) {
            // At the end of the file the parser takes an open bracket for a key.
            throw Refusal{mark, kind == YamlNode::Kind::empty
                                    ? "a key must be plain text"
                                    : "a key must be plain text, or this bracket is never closed"};
        }
        if (++m_nodes > k_max_yaml_nodes) {
            throw Refusal{mark, "more than " + std::to_string(k_max_yaml_nodes) +
                                    " values, the most a file may hold"};
        }
        YamlNode node;
        node.kind = kind;
        node.offset = offset_of(mark);
        return node;
    }

    void take_key(const YAML::Mark& mark, const std::string& key) {
        Open& map = m_open.back();
        const auto [known, is_new] = map.keys.emplace(key, mark.line + 1);
        if (!is_new) {
            throw Refusal{mark, "this key stands already in line " + std::to_string(known->second) +
                                    "; keep one of them"};
        }
        map.key = key;
        map.key_offset = offset_of(mark);
        map.has_key = true;
    }

    void open(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
              YamlNode::Kind kind) {
        refuse_anchor(mark, anchor);
        refuse_tag(mark, tag);
        if (m_open.size() == k_max_yaml_depth) {
            throw Refusal{mark, "nested deeper than " + std::to_string(k_max_yaml_depth) +
                                    " levels, the most a file may have"};
        }
        Open next;
        next.node = make(mark, kind);
        m_open.push_back(std::move(next));
    }

    void close() {
        YamlNode node = std::move(m_open.back().node);
        m_open.pop_back();
        add(std::move(node));
    }

    void add(YamlNode node) {
        if (m_open.empty()) {
            m_root = std::move(node);
            return;
        }
        Open& parent = m_open.back();
        if (parent.has_key) {
            node.key = std::move(parent.key);
            node.key_offset = parent.key_offset;
            if (node.kind == YamlNode::Kind::empty) {
                node.offset = node.key_offset;
            }
            parent.has_key = false;
        }
        parent.node.children.push_back(std::move(node));
    }

    YamlNode m_root;
    std::vector<Open> m_open;
    std::size_t m_nodes = 0;
    bool m_has_document = false;
};

std::string_view without_byte_order_mark(std::string_view text) {
    constexpr std::string_view k_mark = "\xEF\xBB\xBF";
    return text.substr(0, k_mark.size()) == k_mark ? text.substr(k_mark.size()) : text;
}

} // namespace

Result<YamlDocument> parse_yaml(std::string_view content, const std::filesystem::path& file) {
    YamlDocument document{file, std::string{without_byte_order_mark(content)}, {}};
    if (const auto checked = check_text(document.text, file); !checked) {
        return tl::unexpected{checked.error()};
    }
    const auto place_of = [&](const YAML::Mark& mark) {
        return mark.is_null() ? file.string()
                              : place(file, position_of(document.text, offset_of(mark)));
    };
    try {
        TreeBuilder builder;
        std::istringstream stream{document.text};
        YAML::Parser parser{stream};
        while (parser.HandleNextDocument(builder)) {
        }
        document.root = builder.take_root();
    } catch (const Refusal& refusal) {
        return fail(ErrorCode::bad_format, place_of(refusal.mark) + ": " + refusal.reason);
    } catch (const YAML::Exception& error) {
        return fail(ErrorCode::bad_format, place_of(error.mark) + ": not YAML: " + error.msg);
    } catch (const std::exception& error) {
        return fail(ErrorCode::bad_format, file.string() + ": not YAML: " + error.what());
    }
    return document;
}

} // namespace sagitta::config
