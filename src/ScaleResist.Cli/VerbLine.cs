// One verb's words taken apart: its network, its options, its flags. Values stay text here.
// System.CommandLine splits the line; unknown names get one line with a suggestion instead of its page of help.

using System.CommandLine;
using System.CommandLine.Parsing;
using ScaleResist.Graphs;

namespace ScaleResist.Cli;

/// <summary>The words after a verb, by name.</summary>
internal sealed class VerbLine
{
    private readonly Dictionary<string, string?> values = [];
    private readonly HashSet<string> flags = [];

    private VerbLine(string? network) => Network = network;

    /// <summary>The network named, or null.</summary>
    public string? Network { get; }

    /// <summary>The value of an option, or null where it is not given.</summary>
    public string? this[string name] => values[name];

    /// <summary>Whether a flag is given.</summary>
    public bool Has(string flag) => flags.Contains(flag);

    /// <summary>Takes a line apart, or gives null and the problem.</summary>
    /// <param name="verb">The verb, for messages.</param>
    /// <param name="job">What takes one network: <c>an estimate</c>.</param>
    /// <param name="options">Names of options with a value, without dashes.</param>
    /// <param name="switches">Names of flags, without dashes.</param>
    /// <param name="args">The words after the verb.</param>
    /// <param name="problem">One line, empty where all is well.</param>
    public static VerbLine? Parse(string verb, string job, string[] options, string[] switches, string[] args, out string problem)
    {
        Argument<string?> network = new("NETWORK") { Arity = ArgumentArity.ZeroOrOne };
        Command command = new(verb) { network };
        Dictionary<string, Option<string?>> named = options.ToDictionary(name => name, name => new Option<string?>("--" + name));
        Dictionary<string, Option<bool>> flagged =
            switches.ToDictionary(name => name, name => new Option<bool>("--" + name) { Arity = ArgumentArity.Zero });
        foreach (Option option in named.Values.Concat<Option>(flagged.Values))
            command.Add(option);

        // No response files and no bundling: '@x' and '-5' are a file's name and a value.
        ParseResult parsed = CommandLineParser.Parse(command, args,
            new ParserConfiguration { ResponseFileTokenReplacer = null, EnablePosixBundling = false });

        // An unknown option lands where the network or a stray word would.
        List<string> words = [.. parsed.UnmatchedTokens];
        if (parsed.GetValue(network) is string first)
            words.Insert(0, first);
        problem = "";
        if (words.FirstOrDefault(w => w.StartsWith('-') && w.Length > 1) is string unknown)
        {
            string name = unknown.Split('=')[0];
            string hint = Suggestion.For(name, [.. command.Options.Select(o => o.Name), "--help"]) is string near
                ? $"did you mean {near}?"
                : $"see scaleresist {verb} --help";
            problem = $"unknown option '{InputException.Show(name)}'; {hint}";
        }
        // System.CommandLine takes `--probes --seed` as the value "--seed".
        else if (named.Values.FirstOrDefault(o => parsed.GetResult(o)?.Tokens is [{ Value: string v }, ..]
            && command.Options.Any(other => other.Name == v)) is Option<string?> empty)
        {
            problem = NeedsValue(empty);
        }
        else if (words.Count > 1)
        {
            problem = $"'{InputException.Show(words[1])}' is one word too many; {job} takes one network (quote names with spaces)";
        }
        else if (parsed.Errors.Count > 0)
        {
            problem = Problem(parsed.Errors[0]);
        }
        if (problem.Length > 0)
            return null;
        VerbLine line = new(parsed.GetValue(network));
        foreach ((string name, Option<string?> option) in named)
            line.values[name] = parsed.GetValue(option);
        foreach ((string name, Option<bool> option) in flagged)
        {
            if (parsed.GetValue(option))
                line.flags.Add(name);
        }
        return line;

        string NeedsValue(Option option) => $"{option.Name} needs a value; see scaleresist {verb} --help";

        string Problem(ParseError error) => error.SymbolResult switch
        {
            OptionResult { Tokens.Count: 0 } option => NeedsValue(option.Option),
            OptionResult { Tokens.Count: > 1 } option => $"{option.Option.Name} is given more than once; give it one value",
            _ => $"{error.Message.TrimEnd('.')}; see scaleresist {verb} --help",
        };
    }
}
