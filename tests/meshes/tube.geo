// A tube of two layers as a half section, in millimetres: radii 30, 31 and 33, 10 high.
// In: quads = 1 for quadrilaterals.
SetFactory("Built-in");
DefineConstant[ quads = 0 ];
radii[] = {30, 31, 33};
For k In {0:2}
  Point(1 + k) = {radii[k], 0, 0, 0.8};
  Point(11 + k) = {radii[k], 10, 0, 0.8};
  Line(21 + k) = {1 + k, 11 + k};
EndFor
For k In {0:1}
  Line(31 + k) = {1 + k, 2 + k};
  Line(41 + k) = {11 + k, 12 + k};
  Curve Loop(51 + k) = {31 + k, 22 + k, -(41 + k), -(21 + k)};
  Plane Surface(61 + k) = {51 + k};
EndFor
If (quads)
  Transfinite Curve{21, 22, 23} = 7;
  Transfinite Curve{31, 41} = 3;
  Transfinite Curve{32, 42} = 5;
  Transfinite Surface{61, 62};
  Recombine Surface{61, 62};
EndIf
Physical Curve("inside") = {21};
Physical Curve("outside") = {23};
Physical Curve("heel") = {31, 32};
Physical Curve("brim") = {41, 42};
Physical Surface("liner") = {61};
Physical Surface("body") = {62};
