#include "io/section_file.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "io/catalogue_file.h"
#include "tests/io/readme_example.h"

namespace {

using engine::Surroundings;
using io::SectionFile;
using testing::ElementsAre;
using testing::HasSubstr;
using testing::IsEmpty;

SectionFile read(const std::string& text) {
  return io::read_section_text("format: idlewire-section/1\n" + text, "one.yaml", io::builtin_catalogue());
}

std::vector<std::string> messages(const SectionFile& file) {
  std::vector<std::string> words;
  for (const auto& fault : file.faults) words.push_back(to_string(fault));
  return words;
}

std::vector<std::string> faults_of(const std::string& text) { return messages(read(text)); }

const std::string k_two_wires = R"(enclosure: {kind: open}
reference: b
conductors:
  - {name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}
  - {name: b, x: 10 mm, y: 0 mm, diameter: 2 mm}
)";

// Trade size 3/4 EMT with one insulated wire on its floor, all in SI.
TEST(SectionFile, ReadsAMetalTube) {
  const SectionFile file = read(R"(frequency: 50 Hz
temperature: 68 degF
tolerance: 1e-5
enclosure: {kind: metal_tube, inner_diameter: 20.93 mm, outer_diameter: 23.42 mm, material: steel}
reference: enclosure
conductors:
  - {name: a, x: -1.7 mm, y: -7.9 mm, diameter: 2.05 mm, material: copper, strands: 7,
     insulation: [{outer_diameter: 3.1 mm, material: PVC}, {outer_diameter: 3.3 mm, permittivity: 3.6, loss_tangent: 0.05}]}
)");
  ASSERT_THAT(messages(file), IsEmpty());
  const engine::CrossSection& section = file.section;
  EXPECT_EQ(section.surroundings, Surroundings::metal_tube);
  EXPECT_DOUBLE_EQ(section.tube_inner_radius, 10.465e-3);
  EXPECT_DOUBLE_EQ(section.tube_outer_radius, 11.71e-3);
  EXPECT_DOUBLE_EQ(section.tube_metal.conductivity,
                   io::builtin_catalogue().materials.at("steel").conductivity);
  EXPECT_DOUBLE_EQ(section.tolerance, 1e-5);
  EXPECT_DOUBLE_EQ(file.conditions.frequency, 50.0);
  EXPECT_NEAR(file.conditions.temperature, 20.0, 1e-12);
  ASSERT_EQ(section.conductors.size(), 1u);
  const engine::RoundConductor& a = section.conductors[0];
  EXPECT_DOUBLE_EQ(a.centre.x(), -1.7e-3);
  EXPECT_DOUBLE_EQ(a.centre.y(), -7.9e-3);
  EXPECT_DOUBLE_EQ(a.radius, 1.025e-3);
  EXPECT_EQ(a.strands, 7);
  ASSERT_EQ(a.layers.size(), 2u);
  EXPECT_DOUBLE_EQ(a.layers[0].outer_radius, 1.55e-3);
  EXPECT_DOUBLE_EQ(a.layers[0].dielectric.permittivity,
                   io::builtin_catalogue().materials.at("PVC").permittivity);
  EXPECT_DOUBLE_EQ(a.layers[1].dielectric.permittivity, 3.6);
  EXPECT_DOUBLE_EQ(a.layers[1].dielectric.loss_tangent, 0.05);
  EXPECT_THAT(file.names, ElementsAre("a"));
  EXPECT_EQ(file.reference, "enclosure");
  EXPECT_THAT(file.materials, ElementsAre(HasSubstr("steel: "), HasSubstr("copper: 58 MS/m"),
                                          HasSubstr("PVC: permittivity 4.6")));
}

TEST(SectionFile, ReadsTubesJacketsAndShellsOverAPlane) {
  const SectionFile file = read(R"(enclosure: {kind: plane}
conductors:
  - {name: a, x: 0 mm, y: 20 mm, diameter: 2 mm}
  - {name: b, x: 50 mm, y: 20 mm, diameter: 2 mm, material: {conductivity: 35 MS/m, relative_permeability: 2}}
  - {name: c, x: 80 mm, y: 20 mm, diameter: 2 mm}
tubes:
  - {centre: [80 mm, 23.35 mm], inner_diameter: 20.9 mm, outer_diameter: 26.7 mm, permittivity: 3.3}
jackets:
  - {centre: [50 mm, 20 mm], circle: {diameter: 8.6 mm}, permittivity: 4.5}
  - {centre: [0 mm, 20 mm], circle: {diameter: 20 mm}, material: PVC, filler: {permittivity: 2.5}, wall: 1 mm}
shells:
  - {name: armour, centre: [0 mm, 20 mm], inner_diameter: 11 mm, outer_diameter: 12 mm, material: aluminium,
     filler: {material: PE}, insulation: [{outer_diameter: 14 mm, material: PVC}]}
)");
  ASSERT_THAT(messages(file), IsEmpty());
  const engine::CrossSection& section = file.section;
  EXPECT_EQ(section.surroundings, Surroundings::plane);
  EXPECT_EQ(file.reference, "plane");
  EXPECT_THAT(file.names, ElementsAre("a", "b", "c", "armour"));
  EXPECT_DOUBLE_EQ(section.conductors[1].metal.conductivity, 35e6);
  EXPECT_DOUBLE_EQ(section.conductors[1].metal.relative_permeability, 2.0);
  ASSERT_EQ(section.bodies.size(), 3u);
  EXPECT_DOUBLE_EQ(section.bodies[0].inner_radius, 10.45e-3);
  EXPECT_DOUBLE_EQ(section.bodies[0].filler.permittivity, 1.0);  // a conduit holds air
  EXPECT_DOUBLE_EQ(section.bodies[1].outer_radius, 4.3e-3);
  EXPECT_DOUBLE_EQ(section.bodies[1].filler.permittivity, 4.5);  // a jacket without a filler is solid
  EXPECT_DOUBLE_EQ(section.bodies[2].inner_radius, 9e-3);
  EXPECT_DOUBLE_EQ(section.bodies[2].filler.permittivity, 2.5);
  ASSERT_EQ(section.shells.size(), 1u);
  EXPECT_DOUBLE_EQ(section.shells[0].inner_radius, 5.5e-3);
  EXPECT_DOUBLE_EQ(section.shells[0].filler.permittivity, 2.3);
  EXPECT_DOUBLE_EQ(section.shells[0].covered_radius(), 7e-3);
}

TEST(SectionFile, ReadsAnOpenSectionWithItsReference) {
  const SectionFile file = read(k_two_wires);
  ASSERT_THAT(messages(file), IsEmpty());
  EXPECT_EQ(file.section.surroundings, Surroundings::open);
  EXPECT_EQ(file.section.reference, 1);
  EXPECT_EQ(file.reference, "b");
  EXPECT_DOUBLE_EQ(file.conditions.frequency, 60.0);
  EXPECT_DOUBLE_EQ(file.section.tolerance, 1e-4);
}

// What the README shows is read as it stands.
TEST(SectionFile, ReadsTheExampleOfTheReadme) {
  const SectionFile file =
      io::read_section_text(io::readme_example("The section file"), "README.md", io::builtin_catalogue());
  EXPECT_THAT(messages(file), IsEmpty());
  EXPECT_THAT(file.names, ElementsAre("a", "b", "armour"));
  EXPECT_EQ(file.section.bodies.size(), 2u);
}

TEST(SectionFile, AShellCanBeTheReference) {
  const SectionFile file = read(R"(enclosure: {kind: open}
reference: screen
conductors: [{name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}]
shells: [{name: screen, centre: [0 mm, 0 mm], inner_diameter: 8 mm, outer_diameter: 9 mm, material: copper}]
)");
  ASSERT_THAT(messages(file), IsEmpty());
  EXPECT_EQ(file.section.reference, 1);
}

TEST(SectionFile, ReadsAFlatJacketAndAWireway) {
  const SectionFile file = read(R"(enclosure: {kind: rectangle, width: 100 mm, height: 50 mm}
conductors:
  - {name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}
jackets:
  - {centre: [0 mm, 0 mm], stadium: {width: 9.6 mm, height: 4.6 mm}, permittivity: 4.5,
     filler: {permittivity: 2.5}, wall: 0.8 mm}
  - {centre: [30 mm, 0 mm], stadium: {width: 4 mm, height: 9 mm}, material: PVC}
)");
  ASSERT_THAT(messages(file), IsEmpty());
  EXPECT_TRUE(file.section.tube_core.half_size.isApprox(Eigen::Vector2d(50e-3, 25e-3)));
  EXPECT_EQ(file.section.tube_inner_radius, 0.0);
  EXPECT_DOUBLE_EQ(file.section.tube_outer_radius, 1.5e-3);
  EXPECT_THAT(file.materials, testing::Contains(HasSubstr("wall of the enclosure: 1.5 mm")));
  ASSERT_EQ(file.section.bodies.size(), 2u);
  EXPECT_TRUE(file.section.bodies[0].core.half_size.isApprox(Eigen::Vector2d(2.5e-3, 0.0)));
  EXPECT_DOUBLE_EQ(file.section.bodies[0].outer_radius, 2.3e-3);
  EXPECT_DOUBLE_EQ(file.section.bodies[0].inner_radius, 1.5e-3);
  EXPECT_TRUE(file.section.bodies[1].core.half_size.isApprox(Eigen::Vector2d(0.0, 2.5e-3)));
}

TEST(SectionFile, OutlinesTakeTheirOwnKeysAlone) {
  EXPECT_THAT(
      faults_of("enclosure: {kind: rectangle, inner_diameter: 9 mm, height: 10 mm}\n"
                "conductors: [{name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}]\n"),
      ElementsAre(HasSubstr("one.yaml:2:12: error: enclosure: width is missing"),
                  HasSubstr("one.yaml:2:30: error: enclosure: inner_diameter belongs to another kind")));
  EXPECT_THAT(faults_of(k_two_wires + "jackets: [{centre: [0 mm, 0 mm], permittivity: 4.5}]\n"),
              ElementsAre(HasSubstr("jacket 1: takes either a circle or a stadium")));
  EXPECT_THAT(
      faults_of(k_two_wires + "jackets: [{centre: [0 mm, 0 mm], stadium: {width: 9 mm, height: 4 mm}, "
                              "permittivity: 4.5, filler: {permittivity: 2.5}, wall: 2 mm}]\n"),
      ElementsAre(HasSubstr("jacket 1: wall must be under half the thickness of the jacket")));
}

TEST(SectionFile, ReportsWhatSticksOutOfAWireway) {
  EXPECT_THAT(faults_of("enclosure: {kind: rectangle, width: 10 mm, height: 20 mm}\n"
                        "conductors:\n  - {name: a, x: 4.5 mm, y: 0 mm, diameter: 2 mm}\n"
                        "  - {name: b, x: 0 mm, y: 9 mm, diameter: 2 mm}\n"),
              ElementsAre(HasSubstr("one.yaml:4:5: error: conductor 'a': sticks 0.5 mm out of the enclosure"),
                          HasSubstr("one.yaml:5:5: error: conductor 'b': its metal touches the enclosure")));
}

TEST(SectionFile, ReportsEveryFaultWithItsPlace) {
  EXPECT_THAT(
      faults_of(R"(frequency: 60
enclosure: {kind: metal_tube, inner_diameter: 24 mm, outer_diameter: 23 mm, material: stell}
reference: a
conductors:
  - {name: a, x: 0 mm, y: -2 mm, diameter: 2 mm, strands: 6, insulation: [{outer_diameter: 2 mm, permittivity: 0.5}]}
  - {name: a, x: 0 mm, y: 2, diameter: -1 mm, colour: red}
  - {x: 0 mm, y: 2 mm}
)"),
      ElementsAre(
          HasSubstr("one.yaml:2:12: error: frequency 60 has no unit; write '60 Hz'"),
          HasSubstr("one.yaml:3:47: error: enclosure: inner_diameter must be under outer_diameter"),
          HasSubstr("one.yaml:3:87: error: enclosure: material 'stell' is not in the catalogue; the nearest "
                    "is 'steel'"),
          HasSubstr("one.yaml:4:12: error: reference 'a': with this enclosure the reference is the "
                    "enclosure"),
          HasSubstr("one.yaml:6:59: error: conductor 'a': 6 strands do not lie in rings"),
          HasSubstr("one.yaml:6:92: error: conductor 'a': insulation: outer_diameter must be over that of "
                    "what is inside, 2 mm"),
          HasSubstr("one.yaml:6:112: error: conductor 'a': insulation: permittivity '0.5' is not within"),
          HasSubstr("one.yaml:7:12: error: conductor 'a': the name 'a' is taken"),
          HasSubstr("one.yaml:7:27: error: conductor 'a': y 2 has no unit"),
          HasSubstr("one.yaml:7:40: error: conductor 'a': diameter '-1 mm' is not within"),
          HasSubstr("one.yaml:7:47: error: conductor 'a': unknown key 'colour'"),
          HasSubstr("one.yaml:8:5: error: conductor: diameter is missing"),
          HasSubstr("one.yaml:8:5: error: conductor: name is missing")));
}

TEST(SectionFile, AsksForTheReferenceOfAnOpenSection) {
  EXPECT_THAT(
      faults_of("enclosure: {kind: open}\nconductors: [{name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}]\n"),
      ElementsAre(HasSubstr("one.yaml:2:12: error: reference is missing")));
  EXPECT_THAT(
      faults_of("enclosure: {kind: open}\nreference: enclosure\n"
                "conductors: [{name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}]\n"),
      ElementsAre(HasSubstr("one.yaml:3:12: error: reference 'enclosure' is no conductor of the section")));
  EXPECT_THAT(faults_of("enclosure: {kind: open}\nreference: a\n"
                        "conductors: [{name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}]\n"),
              ElementsAre(HasSubstr("one.yaml:3:12: error: an open section has two conductors or more")));
}

TEST(SectionFile, RefusesAnEmptySection) {
  EXPECT_THAT(faults_of("enclosure: {kind: plane}\n"),
              ElementsAre(HasSubstr("the section has no conductors")));
  EXPECT_THAT(faults_of("enclosure: {kind: plane}\nconductors: []\n"),
              ElementsAre(HasSubstr("the section has no conductors")));
  EXPECT_THAT(faults_of("conductors: [{name: a, x: 0 mm, y: 5 mm, diameter: 2 mm}]\n"),
              ElementsAre(HasSubstr("enclosure is missing")));
}

TEST(SectionFile, ReportsAllThatOverlapsByName) {
  EXPECT_THAT(
      faults_of(
          R"(enclosure: {kind: metal_tube, inner_diameter: 20 mm, outer_diameter: 22 mm, material: steel}
conductors:
  - {name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}
  - {name: b, x: 1.5 mm, y: 0 mm, diameter: 2 mm}
  - {name: c, x: 0 mm, y: 9.5 mm, diameter: 2 mm}
  - {name: d, x: 0 mm, y: -9 mm, diameter: 2 mm}
  - {name: e, x: 0 mm, y: 2 mm, diameter: 2 mm}
)"),
      ElementsAre(HasSubstr("one.yaml:5:5: error: conductor 'b': overlaps conductor 'a' by 0.5 mm"),
                  HasSubstr("one.yaml:6:5: error: conductor 'c': sticks 0.5 mm out of the enclosure"),
                  HasSubstr("one.yaml:7:5: error: conductor 'd': its metal touches the enclosure"),
                  HasSubstr("one.yaml:8:5: error: conductor 'e': its metal touches that of conductor 'a'")));
}

TEST(SectionFile, ReportsWhatCrossesAWall) {
  EXPECT_THAT(
      faults_of(R"(enclosure: {kind: plane}
conductors:
  - {name: a, x: 0 mm, y: 10 mm, diameter: 2 mm}
  - {name: b, x: 5 mm, y: 0.5 mm, diameter: 2 mm}
tubes: [{centre: [5 mm, 10 mm], inner_diameter: 9 mm, outer_diameter: 11 mm, material: rigid PVC}]
shells: [{name: s, centre: [30 mm, 10 mm], inner_diameter: 9 mm, outer_diameter: 11 mm, material: copper}]
jackets: [{centre: [30 mm, 10 mm], circle: {diameter: 10 mm}, material: PVC}]
)"),
      ElementsAre(
          HasSubstr("one.yaml:5:5: error: conductor 'b': reaches 0.5 mm under the plane"),
          HasSubstr("one.yaml:6:9: error: tube 1: overlaps conductor 'a'"),
          HasSubstr("one.yaml:8:11: error: jacket 1: crosses the inner wall of shell 's' by 0.5 mm")));
}

TEST(SectionFile, InsulationMayTouch) {
  EXPECT_THAT(faults_of(R"(enclosure: {kind: open}
reference: a
conductors:
  - {name: a, x: 0 mm, y: 0 mm, diameter: 2 mm, insulation: [{outer_diameter: 3 mm, material: PVC}]}
  - {name: b, x: 3 mm, y: 0 mm, diameter: 2 mm, insulation: [{outer_diameter: 3 mm, material: PVC}]}
)"),
              IsEmpty());
}

TEST(SectionFile, RefusesAMetalAsInsulationAndTheOtherWayRound) {
  EXPECT_THAT(faults_of(R"(enclosure: {kind: plane}
conductors:
  - {name: a, x: 0 mm, y: 5 mm, diameter: 2 mm, material: PVC,
     insulation: [{outer_diameter: 3 mm, material: copper}, {outer_diameter: 4 mm}]}
)"),
              ElementsAre(HasSubstr("one.yaml:4:59: error: conductor 'a': material 'PVC' is no metal"),
                          HasSubstr("conductor 'a': insulation: material 'copper' is no insulator"),
                          HasSubstr("conductor 'a': insulation: takes either a material or a permittivity")));
}

TEST(SectionFile, AFileThatIsNotThereIsAFault) {
  const SectionFile file = io::read_section("no/such/section.yaml", io::builtin_catalogue());
  ASSERT_EQ(file.faults.size(), 1u);
  EXPECT_THAT(to_string(file.faults[0]), HasSubstr("no/such/section.yaml"));
}

TEST(SectionFile, AnotherFormatIsNamed) {
  const SectionFile file = io::read_section_text("format: idlewire/1\n", "one.yaml", io::builtin_catalogue());
  EXPECT_THAT(messages(file),
              testing::Contains(HasSubstr("format 'idlewire/1' is not one of idlewire-section/1")));
}

}  // namespace
