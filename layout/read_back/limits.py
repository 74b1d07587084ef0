"""What reading back accepts and how closely a cut must agree, in one table."""

MOST_MIB = 10  # MiB; a disc of 3000 projections takes about 1, other programs' files some times that
MOST_CUTS = 20_000  # contours and points; a dense tune on the largest shipped movement gives 14,000
MOST_VERTICES = 20_000  # vertices of one contour; a rim drawn in straight pieces of 0.1 mm has 13,000
MOST_TRACED = 1_000_000  # points that trace holes and rim; 1,000 rims of the largest disc
FARTHEST_MM = 2_000.0  # mm; what lies farther off was not drawn in mm, unless the movement's own disc reaches so far
COMMENT_WIDTH = 200  # characters; where a long comment in the head of our files goes on in the next line
MOST_REASON = 250  # characters; the longest reason our files carry, and enough of anybody's

REPEATED_WITHIN_MM = 5e-5  # mm; nothing a cutter can tell from nothing, and far above the rounding of a file
STRAIGHT_WITHIN_MM = 1e-5  # mm; a vertex this near a straight line was put in by a program, not by a person
JOINED_WITHIN_MM = 1e-4  # mm; ends of lines and arcs of one contour, after rounding to four decimals
TRACED_WITHIN_MM = 0.002  # mm; how far a traced arc may lie inside the true one: a tenth of what is compared

SHAPE_WITHIN_MM = 0.02  # mm; below the position tolerance of any cutter, above any rounding of a file
SQUARE_WITHIN_DEG = 0.2  # degrees; 0.007 mm over a projection 2 mm long
TRACK_WITHIN_MM = 0.02  # mm; as for shapes
BLANK_WITHIN_MM = 0.02  # mm; as for shapes
CENTRED_WITHIN_MM = 0.01  # mm; a fifth of a cutter's position tolerance, above any rounding of a file
SAME_CUT_MM = 0.01  # mm; two cuts nearer than this are one cut drawn twice
CLEARLY_OUTSIDE_S = 0.01  # s; more than a cut within these tolerances may be early or late
