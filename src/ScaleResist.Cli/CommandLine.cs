// The grammar of the command line. Values stay text here: what they mean, and every message about it, is ours.
// System.CommandLine splits the line; unknown names get one line with a suggestion instead of its page of help.

using System.CommandLine;
using System.CommandLine.Parsing;
using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;

namespace ScaleResist.Cli;

/// <summary>Parses a command line and runs what it asks for.</summary>
internal static class CommandLine
{
    private const string Start = "write scaleresist estimate NETWORK --lake DIR, or see scaleresist --help";

    // Verbs of the contract that later versions bring.
    private static readonly string[] LaterVerbs = ["survey", "tune", "impact", "distances", "lookup", "drift", "merge"];

    /// <summary>Runs a command line.</summary>
    /// <returns>The exit code.</returns>
    public static int Run(string[] args, CliHost host, CancellationToken interrupted)
    {
        if (args.Length == 0)
            return Refuse(host, "no verb is given; " + Start);
        if (args[0] is "--version")
        {
            string commit = ProgramVersion.Commit is string known ? $" ({known})" : "";
            host.Out.WriteLine($"scaleresist {ProgramVersion.Number}{commit}");
            return ExitCode.Done;
        }
        if (args[0] is "--help" or "-h" or "-?" or "help")
        {
            host.Out.Write(HelpText.Program);
            return ExitCode.Done;
        }
        if (args[0] != "estimate")
            return Refuse(host, UnknownVerb(args[0]));
        if (args.Skip(1).Any(a => a is "--help" or "-h" or "-?"))
        {
            host.Out.Write(HelpText.Estimate);
            return ExitCode.Done;
        }
        EstimateOptions? options = ParseEstimate(args, out string problem);
        EstimateRequest? request = options is null ? null
            : EstimateValidation.Validate(options, host.Time.GetUtcNow(), out problem);
        return request is null ? Refuse(host, problem) : new EstimateCommand(host).Run(request, interrupted);
    }

    /// <summary>Prints the one line of a refused command.</summary>
    public static int Refuse(CliHost host, string problem)
    {
        host.Error.WriteLine($"scaleresist: {problem.ReplaceLineEndings(" ")}");
        return ExitCode.CommandLine;
    }

    private static string UnknownVerb(string verb)
    {
        string shown = InputException.Show(verb);
        if (LaterVerbs.Contains(verb))
            return $"'{shown}' is not in this version; it has: estimate";
        if (verb.StartsWith('-'))
            return $"unknown option '{shown}' before the verb; {Start}";
        return Suggestion.For(verb, [.. LaterVerbs, "estimate"]) is string near
            ? $"unknown verb '{shown}'; did you mean {near}?"
            : $"unknown verb '{shown}'; {Start}";
    }

    private static EstimateOptions? ParseEstimate(string[] args, out string problem)
    {
        Argument<string?> network = new("NETWORK") { Arity = ArgumentArity.ZeroOrOne };
        Dictionary<string, Option<string?>> named = [];
        Command verb = new("estimate") { network };
        foreach (string name in (string[])["lake", "run-id", "want", "weights", "columns", "pairs", "node-weights", "terminals",
            "route", "probes", "target-error", "confidence", "time-budget", "memory-budget", "seed", "threads", "shard"])
        {
            named[name] = new Option<string?>("--" + name);
            verb.Add(named[name]);
        }
        Option<bool> restart = new("--restart") { Arity = ArgumentArity.Zero };
        Option<bool> verbose = new("--verbose") { Arity = ArgumentArity.Zero };
        verb.Add(restart);
        verb.Add(verbose);

        // No response files and no bundling: '@x' and '-5' are a file's name and a value.
        ParseResult parsed = CommandLineParser.Parse(verb, args[1..],
            new ParserConfiguration { ResponseFileTokenReplacer = null, EnablePosixBundling = false });

        // An unknown option lands where the network or a stray word would.
        List<string> words = [.. parsed.UnmatchedTokens];
        if (parsed.GetValue(network) is string first)
            words.Insert(0, first);
        if (words.FirstOrDefault(w => w.StartsWith('-') && w.Length > 1) is string unknown)
        {
            string name = unknown.Split('=')[0];
            string hint = Suggestion.For(name, [.. verb.Options.Select(o => o.Name), "--help"]) is string near
                ? $"did you mean {near}?"
                : "see scaleresist estimate --help";
            problem = $"unknown option '{InputException.Show(name)}'; {hint}";
            return null;
        }
        // System.CommandLine takes `--probes --seed` as the value "--seed".
        if (named.Values.FirstOrDefault(o => parsed.GetResult(o)?.Tokens is [{ Value: string v }, ..]
            && verb.Options.Any(other => other.Name == v)) is Option<string?> empty)
        {
            problem = NeedsValue(empty);
            return null;
        }
        if (words.Count > 1)
        {
            problem = $"'{InputException.Show(words[1])}' is one word too many; "
                + "an estimate takes one network (quote names with spaces)";
            return null;
        }
        if (parsed.Errors.Count > 0)
        {
            problem = Problem(parsed.Errors[0]);
            return null;
        }
        problem = "";
        return new EstimateOptions
        {
            Network = parsed.GetValue(network),
            Lake = Value("lake"),
            RunId = Value("run-id"),
            Want = Value("want"),
            Weights = Value("weights"),
            Columns = Value("columns"),
            Pairs = Value("pairs"),
            NodeWeights = Value("node-weights"),
            Terminals = Value("terminals"),
            Route = Value("route"),
            Probes = Value("probes"),
            TargetError = Value("target-error"),
            Confidence = Value("confidence"),
            TimeBudget = Value("time-budget"),
            MemoryBudget = Value("memory-budget"),
            Seed = Value("seed"),
            Threads = Value("threads"),
            Shard = Value("shard"),
            Restart = parsed.GetValue(restart),
        };

        string? Value(string name) => parsed.GetValue(named[name]);
    }

    private static string NeedsValue(Option option) => $"{option.Name} needs a value; see scaleresist estimate --help";

    private static string Problem(ParseError error) => error.SymbolResult switch
    {
        OptionResult { Tokens.Count: 0 } option => NeedsValue(option.Option),
        OptionResult { Tokens.Count: > 1 } option => $"{option.Option.Name} is given more than once; give it one value",
        _ => $"{error.Message.TrimEnd('.')}; see scaleresist estimate --help",
    };
}
