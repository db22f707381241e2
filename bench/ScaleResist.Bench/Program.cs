// Placeholder entry point, replaced as the room is built.
Console.WriteLine();
